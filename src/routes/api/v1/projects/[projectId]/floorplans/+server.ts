import { json } from '@sveltejs/kit';
import { createFloorplanSchema } from '#lib/contracts/index.ts';
import { operation, PLAN_BODY_BYTES, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { createFloorplan } from '#lib/server/services/floorplans.ts';
import { getProject } from '#lib/server/services/projects.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) => {
	const { floorplans } = await getProject(database(), actor, params.projectId);
	return json({ floorplans });
});

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const { name, document } = await readBody(request, createFloorplanSchema, PLAN_BODY_BYTES);
	const created = await createFloorplan(database(), actor, params.projectId, name, document);
	return json(created, {
		status: 201,
		headers: { location: `/api/v1/floorplans/${created.id}` }
	});
});
