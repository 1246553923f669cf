import { json } from '@sveltejs/kit';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { deleteComment } from '#lib/server/services/threads.ts';
import type { RequestHandler } from './$types';

export const DELETE: RequestHandler = operation(async ({ params }, actor) =>
	json(await deleteComment(database(), actor, params.threadId, params.commentId))
);
