import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { settleThread } from '#lib/server/services/threads.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params }, actor) =>
	json(await settleThread(database(), actor, params.threadId, 'reopen'))
);
