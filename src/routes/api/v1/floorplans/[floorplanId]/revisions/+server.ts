import { json } from '@sveltejs/kit';
import { freezeSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { freeze, listRevisions } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json({ revisions: await listRevisions(database(), actor, params.floorplanId) })
);

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const wanted = await readBody(request, freezeSchema);
	const revision = await freeze(database(), actor, params.floorplanId, wanted);
	return json(revision, {
		status: 201,
		headers: { location: `/api/v1/revisions/${revision.id}` }
	});
});
