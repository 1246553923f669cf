import type { Handle } from '@sveltejs/kit';
import { config } from '../config.ts';
import { Problem, problemResponse } from '../problem.ts';

/** Headers that every answer carries; the server's entry sets the same on static files. */
export const SECURITY_HEADERS: Readonly<Record<string, string>> = {
	'x-content-type-options': 'nosniff',
	'referrer-policy': 'same-origin',
	'permissions-policy': 'camera=(), geolocation=(), microphone=(), payment=(), usb=()',
	'cross-origin-opener-policy': 'same-origin',
	'cross-origin-resource-policy': 'same-origin',
	'x-frame-options': 'DENY'
};

const ONE_YEAR_SECONDS = 31_536_000;

/** Pages have their policy from the framework; everything else is data and may load nothing. */
const DATA_POLICY = "default-src 'none'; frame-ancestors 'none'; base-uri 'none'";

export const securityHeaders: Handle = async ({ event, resolve }) => {
	const response = await resolve(event);
	for (const [name, value] of Object.entries(SECURITY_HEADERS)) response.headers.set(name, value);
	if (config().ORIGIN.startsWith('https:')) {
		response.headers.set(
			'strict-transport-security',
			`max-age=${ONE_YEAR_SECONDS}; includeSubDomains`
		);
	}
	if (!response.headers.has('content-security-policy')) {
		response.headers.set('content-security-policy', DATA_POLICY);
	}
	// Everything that a route answers may be private; static files are not routes.
	if (!response.headers.has('cache-control')) response.headers.set('cache-control', 'no-store');
	return response;
};

const SAFE_METHODS = new Set(['GET', 'HEAD', 'OPTIONS']);

/** Whether the browser says that the request was started by a page of ours. */
function isOwn(request: Request, ownOrigin: string): boolean {
	const site = request.headers.get('sec-fetch-site');
	if (site !== null) return site === 'same-origin' || site === 'none';
	const origin = request.headers.get('origin');
	// No browser leaves both out on a request that changes something; a script of its own may.
	return origin === null || origin === ownOrigin;
}

/**
 * Refuses requests that change something and were started by another site's page, whatever their
 * content type: the framework itself only looks at forms.
 */
export const refuseCrossSite: Handle = async ({ event, resolve }) => {
	if (SAFE_METHODS.has(event.request.method) || isOwn(event.request, event.url.origin)) {
		return resolve(event);
	}
	return problemResponse(
		new Problem('forbidden', 'This request was started by a page of another site.'),
		event.locals.requestId
	);
};
