import type { Handle } from '@sveltejs/kit';
import { log } from '../log.ts';

/** Gives each request an id, answers with it, and writes one line per request. */
export const requestId: Handle = async ({ event, resolve }) => {
	event.locals.requestId = crypto.randomUUID();
	const begin = performance.now();
	const response = await resolve(event);
	response.headers.set('x-request-id', event.locals.requestId);
	log.debug(
		{
			requestId: event.locals.requestId,
			method: event.request.method,
			route: event.route.id,
			status: response.status,
			ms: Math.round(performance.now() - begin),
			user: event.locals.session?.user.id
		},
		'request'
	);
	return response;
};
