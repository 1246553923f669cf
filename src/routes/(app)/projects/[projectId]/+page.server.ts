import { fail, redirect } from '@sveltejs/kit';
import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { addDemoSchema } from '#lib/contracts/index.ts';
import { database } from '#lib/server/db/client.ts';
import { loading, requireActor } from '#lib/server/guard.ts';
import { addDemoFloorplan } from '#lib/server/services/demo.ts';
import { getProject } from '#lib/server/services/projects.ts';
import { getTeam } from '#lib/server/services/team.ts';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = async (event) => {
	const actor = requireActor(event);
	event.depends('manyweir:project');
	return loading(async () => ({
		project: await getProject(database(), actor, event.params.projectId),
		people: (await getTeam(database(), actor)).people,
		isTeamAdmin: actor.isTeamAdmin
	}));
};

export const actions: Actions = {
	demo: async (event) => {
		const actor = requireActor(event);
		const form = await superValidate(event, zod4(addDemoSchema));
		if (!form.valid) return fail(400, { form });
		const { id } = await loading(() =>
			addDemoFloorplan(database(), actor, event.params.projectId, form.data.name)
		);
		redirect(303, `/floorplans/${id}`);
	}
};
