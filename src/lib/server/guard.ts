import { error, redirect, type RequestEvent } from '@sveltejs/kit';
import type { Actor } from './audit.ts';
import { asProblem } from './hooks/problems.ts';

/** Only paths of this product are followed: not //host, /\host or an encoded form of them. */
export function ownPath(path: string, fallback: string): string {
	let decoded: string;
	try {
		decoded = decodeURIComponent(path);
	} catch {
		return fallback;
	}
	return /^\/(?![/\\])/.test(path) && /^\/(?![/\\])/.test(decoded) && !/[\r\n\t]/.test(decoded)
		? path
		: fallback;
}

/** Whoever is signed in; others are sent to sign in and come back afterwards. */
export function requireActor(event: RequestEvent): Actor {
	if (event.locals.actor) return event.locals.actor;
	const { unavailable } = event.locals;
	if (unavailable) error(unavailable.status, unavailable.message);
	const next = event.url.pathname + event.url.search;
	redirect(303, next === '/' ? '/sign-in' : `/sign-in?next=${encodeURIComponent(next)}`);
}

/** Runs a page's load: a problem of a service becomes the page for it. */
export async function loading<T>(work: () => Promise<T>): Promise<T> {
	try {
		return await work();
	} catch (reason) {
		const problem = asProblem(reason);
		if (!problem) throw reason;
		error(problem.status, problem.message);
	}
}
