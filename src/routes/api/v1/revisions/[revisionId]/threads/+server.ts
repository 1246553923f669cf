import { json } from '@sveltejs/kit';
import { openThreadSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { listThreads, openThread } from '#lib/server/services/threads.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) => {
	const subject = { kind: 'revision', id: params.revisionId } as const;
	return json({ threads: await listThreads(database(), actor, subject) });
});

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const opening = await readBody(request, openThreadSchema);
	const subject = { kind: 'revision', id: params.revisionId } as const;
	return json(await openThread(database(), actor, subject, opening), { status: 201 });
});
