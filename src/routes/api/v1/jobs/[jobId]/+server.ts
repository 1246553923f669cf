import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getJob } from '#lib/server/services/solves.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json(await getJob(database(), actor, params.jobId))
);
