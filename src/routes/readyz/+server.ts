import { database } from '#lib/server/db/client.ts';
import { answering } from '#lib/server/hooks/problems.ts';
import { requireReady } from '#lib/server/services/readiness.ts';
import type { RequestHandler } from './$types';

/** Ready: the database answers and has the schema of this build. */
export const GET: RequestHandler = ({ locals }) =>
	answering(locals.requestId, async () => {
		await requireReady(database());
		return new Response('ready\n');
	});
