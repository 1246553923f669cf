import { fail, message, setError, superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { redirect } from '@sveltejs/kit';
import { changePasswordSchema } from '#lib/contracts/index.ts';
import { listSessions } from '#lib/server/auth/session.ts';
import { database } from '#lib/server/db/client.ts';
import { endCookie, problemOf } from '#lib/server/forms.ts';
import { requireActor } from '#lib/server/guard.ts';
import { changePassword, signOutEverywhere } from '#lib/server/services/accounts.ts';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = async (event) => {
	const { userId } = requireActor(event);
	const sessions = await listSessions(database(), userId);
	return {
		// The id is a hash, but a page needs only to tell its own session.
		sessions: sessions.map(({ id, createdAt, userAgent }) => ({
			isThis: id === event.locals.session?.id,
			createdAt: createdAt.toISOString(),
			userAgent
		})),
		form: await superValidate(zod4(changePasswordSchema))
	};
};

export const actions: Actions = {
	password: async (event) => {
		const actor = requireActor(event);
		const form = await superValidate(event, zod4(changePasswordSchema));
		if (!form.valid) return fail(400, { form });
		try {
			await changePassword(database(), actor, event.locals.session?.id ?? '', form.data);
		} catch (error) {
			const problem = problemOf(error);
			const field = problem.options.errors?.[0]?.path === 'current' ? 'current' : 'password';
			return setError(form, field, problem.message);
		}
		return message(form, 'The password was changed; every other browser is signed out.');
	},
	everywhere: async (event) => {
		await signOutEverywhere(database(), requireActor(event));
		endCookie(event);
		redirect(303, '/sign-in');
	}
};
