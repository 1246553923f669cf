import { redirect } from '@sveltejs/kit';
import { fail, setError, superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { createProjectSchema } from '#lib/contracts/index.ts';
import { database } from '#lib/server/db/client.ts';
import { problemOf } from '#lib/server/forms.ts';
import { requireActor } from '#lib/server/guard.ts';
import { createProject, listProjects } from '#lib/server/services/projects.ts';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = async (event) => ({
	projects: await listProjects(database(), requireActor(event)),
	form: await superValidate(zod4(createProjectSchema))
});

export const actions: Actions = {
	default: async (event) => {
		const actor = requireActor(event);
		const form = await superValidate(event, zod4(createProjectSchema));
		if (!form.valid) return fail(400, { form });
		let id: string;
		try {
			({ id } = await createProject(database(), actor, form.data.name));
		} catch (error) {
			return setError(form, 'name', problemOf(error).message);
		}
		redirect(303, `/projects/${id}`);
	}
};
