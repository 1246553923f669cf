import type { Handle, HandleServerError } from '@sveltejs/kit';
import { codeOf, log } from '../log.ts';
import { Problem, problemResponse } from '../problem.ts';

/** Postgres is not there, shuts down, or has no room: the request may work in a while. */
const AWAY =
	/^(ECONNREFUSED|ECONNRESET|ETIMEDOUT|EHOSTUNREACH|EPIPE|CONNECT_TIMEOUT|CONNECTION_(CLOSED|ENDED|DESTROYED)|57P0\d|53\w{3}|08\w{3})$/;
/** It is there, but the wait for a lock or the statement took too long. */
const BUSY = /^(55P03|57014)$/;
const RETRY_AFTER_SECONDS = 5;

/** An expected problem, or that the database is away; anything else is a fault of ours. */
export function asProblem(error: unknown): Problem | null {
	if (error instanceof Problem) return error;
	const code = codeOf(error);
	const isBusy = BUSY.test(code);
	if (!isBusy && !AWAY.test(code)) return null;
	return new Problem(
		'unavailable',
		isBusy
			? 'The database is busy. Try again in a moment.'
			: 'The database is away or full. Try again in a moment.',
		{ retryAfterSeconds: RETRY_AFTER_SECONDS }
	);
}

/** Statuses that the framework itself answers with, as problem documents for the API. */
const FRAMEWORK_PROBLEMS: Readonly<Record<number, string>> = {
	404: 'There is no such address.',
	405: 'This address does not know this method.',
	413: 'The request is larger than allowed here.'
};

/** Answers of the API that are not yet problem documents become such. */
export const apiProblems: Handle = async ({ event, resolve }) => {
	const response = await resolve(event);
	if (!event.url.pathname.startsWith('/api/') || response.status < 400) return response;
	if (response.headers.get('content-type')?.startsWith('application/problem+json')) return response;
	const detail = FRAMEWORK_PROBLEMS[response.status] ?? 'Something went wrong on the server.';
	const headers = new Headers({ 'content-type': 'application/problem+json' });
	const allow = response.headers.get('allow');
	if (allow) headers.set('allow', allow);
	return new Response(
		JSON.stringify({
			type: 'about:blank',
			title: detail,
			status: response.status,
			detail,
			instance: event.locals.requestId
		}),
		{ status: response.status, headers }
	);
};

/** Errors that nobody expected: logged with the request's id, told without any detail. */
export const handleError: HandleServerError = ({ error, event, status, message }) => {
	const { requestId } = event.locals;
	if (status >= 500) {
		log.error({ requestId, route: event.route.id, error }, 'request failed');
	}
	const problem = asProblem(error);
	return {
		message: problem?.message ?? (status === 404 ? 'There is no such page.' : message),
		requestId
	};
};

/** Runs an API handler and turns its problems into answers. */
export async function answering(
	requestId: string,
	work: () => Promise<Response>
): Promise<Response> {
	try {
		return await work();
	} catch (error) {
		const problem = asProblem(error);
		if (!problem) throw error;
		return problemResponse(problem, requestId);
	}
}
