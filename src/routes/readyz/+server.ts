import { sql } from 'drizzle-orm';
import { database } from '#lib/server/db/client.ts';
import { answering } from '#lib/server/hooks/problems.ts';
import type { RequestHandler } from './$types';

/** Ready: the database answers. */
export const GET: RequestHandler = ({ locals }) =>
	answering(locals.requestId, async () => {
		await database().execute(sql`select 1`);
		return new Response('ready\n');
	});
