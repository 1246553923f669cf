import { redirect } from '@sveltejs/kit';
import { requireActor } from '#lib/server/guard.ts';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = (event) => {
	requireActor(event);
	redirect(303, '/projects');
};
