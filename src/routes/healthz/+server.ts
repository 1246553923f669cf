import type { RequestHandler } from './$types';

/** Alive: depends on nothing else. */
export const GET: RequestHandler = () => new Response('alive\n');
