import { redirect } from '@sveltejs/kit';
import { endSession } from '#lib/server/auth/session.ts';
import { database } from '#lib/server/db/client.ts';
import { endCookie } from '#lib/server/forms.ts';
import type { RequestHandler } from './$types';

/** Ends the session of this browser; harmless where there is none. */
export const POST: RequestHandler = async (event) => {
	if (event.locals.session) await endSession(database(), event.locals.session.id);
	endCookie(event);
	redirect(303, '/sign-in');
};
