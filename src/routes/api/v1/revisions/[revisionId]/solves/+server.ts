import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { solveRevision } from '#lib/server/services/revisions.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params }, actor) =>
	json(await solveRevision(database(), actor, params.revisionId), { status: 202 })
);
