import { drizzle } from 'drizzle-orm/postgres-js';
import { migrate } from 'drizzle-orm/postgres-js/migrator';
import { runMigrations } from 'graphile-worker';
import postgres from 'postgres';

/** Any number, as long as every process takes the same. */
const MIGRATION_LOCK = 7_218_441;
/** A migration that waits for a lock longer than this fails, rather than hold up everybody behind it. */
const LOCK_TIMEOUT = '15s';

/**
 * Brings a database to the present schema, the queue's included. Processes that start together take
 * turns by an advisory lock; what the first has done the others find done.
 *
 * @param folder where the SQL migrations are
 */
export async function migrateDatabase(url: string, folder: string): Promise<void> {
	const sql = postgres(url, { max: 1, onnotice: () => {}, connect_timeout: 10 });
	try {
		await sql`select pg_advisory_lock(${MIGRATION_LOCK})`;
		// After the lock above, since waiting for one's turn is no fault.
		await sql`select set_config('lock_timeout', ${LOCK_TIMEOUT}, false)`;
		await migrate(drizzle(sql, { casing: 'snake_case' }), { migrationsFolder: folder });
		await runMigrations({ connectionString: url });
	} finally {
		await sql.end({ timeout: 5 });
	}
}
