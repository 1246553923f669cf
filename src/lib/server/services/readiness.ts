import { sql } from 'drizzle-orm';
import journal from '../../../../drizzle/meta/_journal.json' with { type: 'json' };
import type { Handle } from '../db/client.ts';
import { Problem } from '../problem.ts';

/** When the newest migration that this build knows was made. */
const NEWEST_MIGRATION = Math.max(...journal.entries.map(({ when }) => when));

/** Throws where requests cannot be served: the database does not answer or is of an older schema. */
export async function requireReady(db: Handle): Promise<void> {
	const [{ isFounded }] = await db.execute<{ isFounded: boolean }>(
		sql`select to_regclass('drizzle.__drizzle_migrations') is not null as "isFounded"`
	);
	if (isFounded) {
		const [{ newest }] = await db.execute<{ newest: string | null }>(
			sql`select max(created_at) as newest from drizzle.__drizzle_migrations`
		);
		if (Number(newest ?? 0) >= NEWEST_MIGRATION) return;
	}
	throw new Problem('unavailable', 'The database is not yet migrated.', { retryAfterSeconds: 5 });
}
