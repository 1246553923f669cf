import { eq, sql } from 'drizzle-orm';
import { drizzle } from 'drizzle-orm/postgres-js';
import postgres from 'postgres';
import type { Database } from '../db/client.ts';
import { workers } from '../db/schema/index.ts';
import { log } from '../log.ts';

/** First key of the two-key advisory locks that workers hold; the second is the worker's own. */
const LOCK_SPACE = 4310;
/** How often the living look for the dead. */
const SWEEP_INTERVAL_MS = 2000;

/**
 * Tells the living workers from the dead. Each holds an advisory lock on a connection of its own
 * for as long as it lives; the database frees it the moment the process is gone, however it went.
 * The queue itself would wait four hours before it gives a dead worker's job to another.
 */
export class WorkerPresence {
	readonly #sql: postgres.Sql;
	readonly #db: Database;
	#lockKey: number | undefined;
	#timer: NodeJS.Timeout | undefined;

	constructor(url: string, db: Database) {
		this.#sql = postgres(url, {
			max: 1,
			max_lifetime: null,
			onnotice: () => {},
			onclose: () => {
				// The lock went with the connection: take part anew at the next sweep.
				this.#lockKey = undefined;
			}
		});
		this.#db = db;
	}

	/** Takes part under the ids by which the queue knows this process. */
	async join(queueWorkerIds: string[]): Promise<void> {
		const [{ lockKey }] = await this.#db
			.insert(workers)
			.values({ queueWorkerIds })
			.returning({ lockKey: workers.lockKey });
		await this.#sql`select pg_advisory_lock(${LOCK_SPACE}, ${lockKey})`;
		this.#lockKey = lockKey;
		const sweep = async () => {
			try {
				if (this.#lockKey === undefined) {
					await this.join(queueWorkerIds);
					return;
				}
				await this.sweep();
			} catch (error) {
				log.warn({ error }, 'looking for dead workers failed');
			}
			this.#timer = setTimeout(() => void sweep(), SWEEP_INTERVAL_MS);
		};
		clearTimeout(this.#timer);
		await sweep();
	}

	/** Returns the jobs of workers whose lock is free to the queue. */
	async sweep(): Promise<void> {
		const handle = drizzle(this.#sql, { casing: 'snake_case' });
		const known = await handle.select().from(workers);
		for (const worker of known) {
			if (worker.lockKey === this.#lockKey) continue;
			const [{ isFree }] = await this.#sql<{ isFree: boolean }[]>`
				select pg_try_advisory_lock(${LOCK_SPACE}, ${worker.lockKey}) as "isFree"`;
			if (!isFree) continue;
			log.warn({ worker: worker.lockKey }, 'a worker died: its jobs go back to the queue');
			await this.#db.transaction(async (tx) => {
				await tx.execute(
					sql`select graphile_worker.force_unlock_workers(${sql.param(worker.queueWorkerIds)}::text[])`
				);
				await tx.delete(workers).where(eq(workers.lockKey, worker.lockKey));
			});
			await this.#sql`select pg_advisory_unlock(${LOCK_SPACE}, ${worker.lockKey})`;
		}
	}

	async leave(): Promise<void> {
		clearTimeout(this.#timer);
		if (this.#lockKey !== undefined) {
			await this.#db.delete(workers).where(eq(workers.lockKey, this.#lockKey));
		}
		await this.#sql.end({ timeout: 2 });
	}
}
