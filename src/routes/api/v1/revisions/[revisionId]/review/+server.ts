import { json } from '@sveltejs/kit';
import { askReviewSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { askReview } from '#lib/server/services/review.ts';
import { getRevision } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const wanted = await readBody(request, askReviewSchema);
	await askReview(database(), actor, params.revisionId, wanted);
	return json(await getRevision(database(), actor, params.revisionId));
});
