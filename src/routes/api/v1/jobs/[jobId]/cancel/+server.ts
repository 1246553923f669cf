import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { cancel } from '#lib/server/services/solves.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params }, actor) =>
	json(await cancel(database(), actor, params.jobId))
);
