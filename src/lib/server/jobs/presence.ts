import { arrayContains, eq, sql } from 'drizzle-orm';
import { drizzle } from 'drizzle-orm/postgres-js';
import postgres from 'postgres';
import { backoff, type Database, type Handle } from '../db/client.ts';
import { workers } from '../db/schema/index.ts';
import * as schema from '../db/schema/index.ts';
import { log } from '../log.ts';
import { failAbandoned, returnJobs } from './return-jobs.ts';

/** First key of the two-key advisory locks that workers hold; the second is the worker's own. */
const LOCK_SPACE = 4310;
/** A worker that has taken a job and is not to be seen after this long is dead. */
const ENTRY_SECONDS = 10;
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
	/** Id under which the queue knows this process. */
	#queueId: string | undefined;
	/** Second key of the lock; undefined once the lock has gone with its connection. */
	#lockKey: number | undefined;
	#timer: NodeJS.Timeout | undefined;

	constructor(url: string) {
		this.#sql = postgres(url, {
			max: 1,
			max_lifetime: null,
			backoff,
			onnotice: () => {},
			onclose: () => {
				this.#lockKey = undefined;
			},
			connection: {
				application_name: 'manyweir-worker',
				statement_timeout: 10_000,
				// A machine that vanishes says no goodbye: ask after it, so that its lock is freed in time.
				tcp_keepalives_idle: 10,
				tcp_keepalives_interval: 5,
				tcp_keepalives_count: 3
			}
		});
		this.#db = drizzle(this.#sql, { schema, casing: 'snake_case' });
	}

	/**
	 * Takes part under an id of the queue, and keeps looking for the dead. What this process held
	 * under an earlier id goes back to the queue.
	 */
	async enter(queueId: string): Promise<void> {
		await this.#register(queueId);
		clearTimeout(this.#timer);
		this.#timer = setTimeout(() => void this.#keepLooking(), SWEEP_INTERVAL_MS);
	}

	/** The row appears together with the lock: a row whose lock is free is a dead worker's. */
	async #register(queueId: string): Promise<void> {
		const earlier = this.#queueId;
		this.#queueId = queueId;
		this.#lockKey = await this.#db.transaction(async (tx) => {
			if (earlier) {
				if (earlier !== queueId) await returnJobs(tx, [earlier]);
				await tx.delete(workers).where(arrayContains(workers.queueWorkerIds, [earlier]));
			}
			const [{ lockKey }] = await tx
				.insert(workers)
				.values({ queueWorkerIds: [queueId] })
				.returning({ lockKey: workers.lockKey });
			await tx.execute(sql`select pg_advisory_lock(${LOCK_SPACE}, ${lockKey})`);
			return lockKey;
		});
	}

	async #keepLooking(): Promise<void> {
		try {
			if (this.#lockKey === undefined && this.#queueId) await this.#register(this.#queueId);
			await this.sweep();
		} catch (error) {
			log.warn({ error }, 'looking for dead workers failed');
		}
		if (this.#queueId) {
			this.#timer = setTimeout(() => void this.#keepLooking(), SWEEP_INTERVAL_MS);
		}
	}

	/** Returns the jobs of dead workers to the queue, and ends those that killed a worker each time. */
	async sweep(): Promise<void> {
		for (const { lockKey, queueWorkerIds } of await this.#db.select().from(workers)) {
			if (lockKey === this.#lockKey) continue;
			await this.#db.transaction(async (tx) => {
				if (!(await this.#isFree(tx, lockKey))) return;
				log.warn({ worker: lockKey }, 'a worker died: its jobs go back to the queue');
				await returnJobs(tx, queueWorkerIds);
				await tx.delete(workers).where(eq(workers.lockKey, lockKey));
			});
		}
		await this.#db.transaction(async (tx) => {
			// Whoever died between taking a job and entering here.
			const unknown = await tx.execute<{ id: string }>(sql`
				select distinct locked_by as id from graphile_worker.jobs
				where locked_at < now() - make_interval(secs => ${ENTRY_SECONDS})
					and not exists (select 1 from workers where locked_by = any(workers.queue_worker_ids))`);
			if (unknown.length > 0) {
				await returnJobs(
					tx,
					unknown.map(({ id }) => id)
				);
			}
		});
		await failAbandoned(this.#db);
	}

	/** Whether nobody holds the lock; if so it is ours until the transaction ends. */
	async #isFree(tx: Handle, lockKey: number): Promise<boolean> {
		const [{ isFree }] = await tx.execute<{ isFree: boolean }>(
			sql`select pg_try_advisory_xact_lock(${LOCK_SPACE}, ${lockKey}) as "isFree"`
		);
		return isFree;
	}

	async leave(): Promise<void> {
		clearTimeout(this.#timer);
		const queueId = this.#queueId;
		this.#queueId = undefined;
		if (queueId) {
			await this.#db.transaction(async (tx) => {
				await returnJobs(tx, [queueId]);
				await tx.delete(workers).where(arrayContains(workers.queueWorkerIds, [queueId]));
			});
		}
		await this.#sql.end({ timeout: 2 });
	}
}
