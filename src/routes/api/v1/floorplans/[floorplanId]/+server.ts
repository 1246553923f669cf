import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getFloorplan } from '#lib/server/services/floorplans.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json(await getFloorplan(database(), actor, params.floorplanId))
);
