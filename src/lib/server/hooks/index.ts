import type { Handle } from '@sveltejs/kit';
import { apiProblems } from './problems.ts';
import { requestId } from './request-id.ts';
import { refuseCrossSite, securityHeaders } from './security.ts';
import { session } from './session.ts';

export { handleError } from './problems.ts';

/**
 * What every request passes through, the first outermost: each sees the answers of those after it,
 * so that also a refusal carries an id and the headers.
 */
export const HOOKS: readonly Handle[] = [
	requestId,
	securityHeaders,
	apiProblems,
	refuseCrossSite,
	session
];
