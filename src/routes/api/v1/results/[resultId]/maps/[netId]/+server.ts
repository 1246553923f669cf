import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getMap } from '#lib/server/services/solves.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) => {
	const gzip = await getMap(database(), actor, params.resultId, params.netId);
	return new Response(new Uint8Array(gzip), {
		headers: { 'content-type': 'application/octet-stream', 'content-encoding': 'gzip' }
	});
});
