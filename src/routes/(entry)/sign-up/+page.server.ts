import { redirect } from '@sveltejs/kit';
import { fail, setError, superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { signUpSchema } from '#lib/contracts/index.ts';
import { beginCookie, caller, problemOf } from '#lib/server/forms.ts';
import { database } from '#lib/server/db/client.ts';
import { signUp } from '#lib/server/services/accounts.ts';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = async ({ locals }) => {
	if (locals.session) redirect(303, '/projects');
	return { form: await superValidate(zod4(signUpSchema)) };
};

export const actions: Actions = {
	default: async (event) => {
		const form = await superValidate(event, zod4(signUpSchema));
		if (!form.valid) return fail(400, { form });
		try {
			beginCookie(event, await signUp(database(), form.data, caller(event)));
		} catch (error) {
			const problem = problemOf(error);
			const path = problem.options.errors?.[0]?.path;
			const field = path === 'email' || path === 'password' ? path : '';
			return setError(form, field, problem.message, { status: problem.status as 400 });
		}
		redirect(303, '/projects');
	}
};
