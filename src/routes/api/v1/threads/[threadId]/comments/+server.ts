import { json } from '@sveltejs/kit';
import { addCommentSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { addComment } from '#lib/server/services/threads.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const { text } = await readBody(request, addCommentSchema);
	return json(await addComment(database(), actor, params.threadId, text), { status: 201 });
});
