import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { getRevision } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) =>
	json(await getRevision(database(), actor, params.revisionId))
);
