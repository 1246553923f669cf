import { redirect } from '@sveltejs/kit';
import { fail, setError, superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { signInSchema } from '#lib/contracts/index.ts';
import { beginCookie, caller, problemOf } from '#lib/server/forms.ts';
import { database } from '#lib/server/db/client.ts';
import { ownPath } from '#lib/server/guard.ts';
import { signIn } from '#lib/server/services/accounts.ts';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = async ({ locals, url }) => {
	const next = ownPath(url.searchParams.get('next') ?? '', '');
	if (locals.session) redirect(303, next || '/projects');
	return { form: await superValidate({ next }, zod4(signInSchema), { errors: false }) };
};

export const actions: Actions = {
	default: async (event) => {
		const form = await superValidate(event, zod4(signInSchema));
		if (!form.valid) return fail(400, { form });
		try {
			beginCookie(event, await signIn(database(), form.data, caller(event)));
		} catch (error) {
			const problem = problemOf(error);
			form.data.password = '';
			return setError(form, '', problem.message, { status: problem.status as 400 });
		}
		redirect(303, ownPath(form.data.next, '/projects'));
	}
};
