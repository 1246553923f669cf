import { redirect } from '@sveltejs/kit';
import { database } from '#lib/server/db/client.ts';
import { endCookie } from '#lib/server/forms.ts';
import { signOut } from '#lib/server/services/accounts.ts';
import type { RequestHandler } from './$types';

/** Ends the session of this browser; harmless where there is none. */
export const POST: RequestHandler = async (event) => {
	const { actor, session } = event.locals;
	if (actor && session) await signOut(database(), actor, session.id);
	endCookie(event);
	redirect(303, '/sign-in');
};
