import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getProject } from '#lib/server/services/projects.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json(await getProject(database(), actor, params.projectId))
);
