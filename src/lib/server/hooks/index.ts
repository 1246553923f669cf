export { apiProblems, handleError } from './problems.ts';
export { requestId } from './request-id.ts';
export { refuseCrossSite, securityHeaders } from './security.ts';
export { session } from './session.ts';
