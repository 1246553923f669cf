import { json } from '@sveltejs/kit';
import { decideSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { decide } from '#lib/server/services/review.ts';
import { getRevision } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const decision = await readBody(request, decideSchema);
	await decide(database(), actor, params.revisionId, decision);
	return json(await getRevision(database(), actor, params.revisionId));
});
