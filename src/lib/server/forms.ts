import type { RequestEvent } from '@sveltejs/kit';
import { sessionCookie, sessionCookieName } from './auth/session.ts';
import { config } from './config.ts';
import { asProblem } from './hooks/problems.ts';
import type { Problem } from './problem.ts';
import type { Caller } from './services/accounts.ts';

function isSecure(): boolean {
	return config().ORIGIN.startsWith('https:');
}

/** Where a form was sent from. */
export function caller(event: RequestEvent): Caller {
	return {
		address: event.getClientAddress(),
		userAgent: event.request.headers.get('user-agent') ?? '',
		requestId: event.locals.requestId
	};
}

/** Gives the browser the cookie of a session that has begun. */
export function beginCookie(event: RequestEvent, token: string): void {
	const { name, value, options } = sessionCookie(token, isSecure());
	event.cookies.set(name, value, options);
}

export function endCookie(event: RequestEvent): void {
	event.cookies.delete(sessionCookieName(isSecure()), { path: '/' });
}

/** The problem to show in the form; whatever nobody expected is thrown on. */
export function problemOf(error: unknown): Problem {
	const problem = asProblem(error);
	if (!problem) throw error;
	return problem;
}
