import type { Handle, RequestEvent } from '@sveltejs/kit';
import { config } from '../config.ts';
import { database } from '../db/client.ts';
import { readSession, sessionCookie, sessionCookieName, type Session } from '../auth/session.ts';
import { asProblem } from './problems.ts';

/**
 * The session of a token. Where the database is away nobody knows whose it is: the request goes on
 * without a session, whatever needs one answers with the problem, and the cookie is kept.
 */
async function find(event: RequestEvent, token: string): Promise<Session | null> {
	try {
		return await readSession(database(), token);
	} catch (error) {
		event.locals.unavailable = asProblem(error);
		if (!event.locals.unavailable) throw error;
		return null;
	}
}

/** Reads the session from the cookie; a page's guard decides what follows from it. */
export const session: Handle = async ({ event, resolve }) => {
	event.locals.session = null;
	event.locals.actor = null;
	event.locals.unavailable = null;
	const isSecure = config().ORIGIN.startsWith('https:');
	const token = event.cookies.get(sessionCookieName(isSecure));
	if (!token) return resolve(event);
	const found = await find(event, token);
	if (found) {
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
	} else if (!event.locals.unavailable) {
		event.cookies.delete(sessionCookieName(isSecure), { path: '/' });
	}
	return resolve(event);
};
