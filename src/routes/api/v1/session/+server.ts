import { json } from '@sveltejs/kit';
import { database } from '#lib/server/db/client.ts';
import { operation } from '#lib/server/api.ts';
import { getSignedIn } from '#lib/server/services/team.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async (_event, actor) =>
	json(await getSignedIn(database(), actor))
);
