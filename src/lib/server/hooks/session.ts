import type { Handle } from '@sveltejs/kit';
import { config } from '../config.ts';
import { database } from '../db/client.ts';
import { readSession, sessionCookie, sessionCookieName } from '../auth/session.ts';

/** Reads the session from the cookie; a page's guard decides what follows from it. */
export const session: Handle = async ({ event, resolve }) => {
	event.locals.session = null;
	event.locals.actor = null;
	const isSecure = config().ORIGIN.startsWith('https:');
	const token = event.cookies.get(sessionCookieName(isSecure));
	const found = token ? await readSession(database(), token) : null;
	if (token && !found) event.cookies.delete(sessionCookieName(isSecure), { path: '/' });
	if (token && found) {
		const { user } = found;
		event.locals.session = found;
		event.locals.actor = {
			userId: user.id,
			teamId: user.teamId,
			isTeamAdmin: user.isTeamAdmin,
			name: user.name,
			requestId: event.locals.requestId
		};
		if (found.isFresh) {
			const { name, value, options } = sessionCookie(token, isSecure);
			event.cookies.set(name, value, options);
		}
	}
	return resolve(event);
};
