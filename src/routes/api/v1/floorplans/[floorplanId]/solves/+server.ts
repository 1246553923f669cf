import { json } from '@sveltejs/kit';
import { requestSolvesSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getSolves, requestSolves } from '#lib/server/services/solves.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json(await getSolves(database(), actor, params.floorplanId))
);

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const wanted = await readBody(request, requestSolvesSchema);
	const solves = await requestSolves(database(), actor, params.floorplanId, wanted);
	return json(solves, {
		status: 202,
		headers: { location: `/api/v1/floorplans/${params.floorplanId}/solves` }
	});
});
