import { drizzle, type PostgresJsDatabase } from 'drizzle-orm/postgres-js';
import postgres from 'postgres';
import { config } from '../config.ts';
import * as schema from './schema/index.ts';

export type Database = PostgresJsDatabase<typeof schema>;
/** A transaction, or the database itself: what queries take. */
export type Handle = Database | Parameters<Parameters<Database['transaction']>[0]>[0];

/** Longest that one statement, a wait for a lock and an idle transaction may take. */
const STATEMENT_TIMEOUT_MS = 30_000;
const LOCK_TIMEOUT_MS = 10_000;
const IDLE_TRANSACTION_TIMEOUT_MS = 30_000;
/** Wait for a connection. */
const CONNECT_TIMEOUT_SECONDS = 10;

/** Longest wait between tries to connect: people wait behind it once the database is back. */
const LONGEST_BACKOFF_SECONDS = 1;

/** Wait before the next try to connect, s; half a tenth at first, doubled each time. */
export function backoff(retries: number): number {
	return Math.min(0.05 * 2 ** retries, LONGEST_BACKOFF_SECONDS);
}

export interface Connection {
	readonly db: Database;
	readonly sql: postgres.Sql;
}

/** Opens a pool of connections. */
export function connect(url: string, connections: number): Connection {
	const sql = postgres(url, {
		max: connections,
		connect_timeout: CONNECT_TIMEOUT_SECONDS,
		backoff,
		onnotice: () => {},
		connection: {
			application_name: 'manyweir',
			statement_timeout: STATEMENT_TIMEOUT_MS,
			lock_timeout: LOCK_TIMEOUT_MS,
			idle_in_transaction_session_timeout: IDLE_TRANSACTION_TIMEOUT_MS
		}
	});
	return { sql, db: drizzle(sql, { schema, casing: 'snake_case' }) };
}

let open: Connection | undefined;

/** The pool of this process, opened at first use. */
export function connection(): Connection {
	open ??= connect(config().DATABASE_URL, config().MANYWEIR_DATABASE_CONNECTIONS);
	return open;
}

export function database(): Database {
	return connection().db;
}

/** Closes the pool; running statements get a moment to end. */
export async function closeDatabase(): Promise<void> {
	const closing = open;
	open = undefined;
	await closing?.sql.end({ timeout: 5 });
}
