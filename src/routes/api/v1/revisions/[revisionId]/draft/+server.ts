import { json } from '@sveltejs/kit';
import { restoreSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { restoreRevision } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const { baseVersion } = await readBody(request, restoreSchema);
	return json(await restoreRevision(database(), actor, params.revisionId, baseVersion));
});
