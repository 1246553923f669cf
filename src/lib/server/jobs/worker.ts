import { EventEmitter } from 'node:events';
import { setTimeout as delay } from 'node:timers/promises';
import { and, inArray, notInArray } from 'drizzle-orm';
import { Logger, run, type Runner, type TaskList } from 'graphile-worker';
import { z } from 'zod';
import type { Connection } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { CANCEL_CHANNEL } from '../events/publish.ts';
import { log } from '../log.ts';
import { TASK } from './enqueue.ts';
import { CANCELLED, STOPPING } from './job-kind.ts';
import { UNFINISHED } from './job-rows.ts';
import { WorkerPresence } from './presence.ts';
import { runJob, type JobRegistry } from './run-job.ts';

const payloadSchema = z.object({ jobId: z.uuid() });

/** The queue is asked at least this often; normally a notification comes first. */
const POLL_INTERVAL_MS = 2000;
/** Wait before the queue is joined anew after it was lost. */
const REJOIN_MS = 1000;

export interface Worker {
	/** Gives up running jobs, which return to the queue, and disconnects. */
	stop(): Promise<void>;
}

/** Starts working on jobs from the queue, one at a time. */
export async function startWorker(
	connection: Connection,
	url: string,
	kinds: JobRegistry
): Promise<Worker> {
	const running = new Map<string, AbortController>();
	const stopping = new AbortController();
	const presence = new WorkerPresence(url);
	const unlisten = await listenForCancels(connection, running);
	const taskList: TaskList = {
		[TASK]: async (payload, helpers) => {
			const { jobId } = payloadSchema.parse(payload);
			const abort = new AbortController();
			running.set(jobId, abort);
			if (stopping.signal.aborted) abort.abort(STOPPING);
			const isLastAttempt = helpers.job.attempts >= helpers.job.max_attempts;
			try {
				await runJob(connection.db, kinds, jobId, abort.signal, isLastAttempt);
			} finally {
				running.delete(jobId);
			}
		}
	};
	let runner = await joinQueue(url, taskList, presence);
	const ended = (async () => {
		while (!stopping.signal.aborted) {
			// It ends by itself when it cannot write down that a job is done.
			await runner.promise.catch((error: unknown) => log.warn({ error }, 'the queue was lost'));
			if (stopping.signal.aborted) return;
			await delay(REJOIN_MS, undefined, { signal: stopping.signal }).catch(() => {});
			if (stopping.signal.aborted) return;
			runner = await joinQueue(url, taskList, presence).catch((error: unknown) => {
				log.warn({ error }, 'the queue is not reached');
				return runner;
			});
		}
	})();
	return {
		async stop() {
			stopping.abort();
			for (const abort of running.values()) abort.abort(STOPPING);
			await runner.stop().catch(() => {
				// It has ended already.
			});
			await ended;
			await unlisten();
			await presence.leave();
		}
	};
}

/** Begins to take jobs from the queue, and shows the others that this worker lives. */
async function joinQueue(
	url: string,
	taskList: TaskList,
	presence: WorkerPresence
): Promise<Runner> {
	const events: NonNullable<Parameters<typeof run>[0]['events']> = new EventEmitter();
	const queueId = new Promise<string>((resolve) => {
		// The queue writes the id of the pool beside each job that it hands out.
		events.on('pool:create', ({ workerPool }) => resolve(workerPool.id));
	});
	const runner = await run({
		connectionString: url,
		concurrency: 1,
		pollInterval: POLL_INTERVAL_MS,
		noHandleSignals: true,
		// Written down in the background with retries, so that a database that is away for a moment
		// does not end the process.
		preset: { worker: { completeJobBatchDelay: 0, failJobBatchDelay: 0 } },
		logger: new Logger(() => (level, message) => {
			if (level === 'error' || level === 'warning') log.warn({ queue: message }, 'queue');
		}),
		taskList,
		events
	});
	try {
		await presence.enter(await queueId);
	} catch (error) {
		await runner.stop();
		throw error;
	}
	return runner;
}

/** Aborts running jobs that are cancelled; also those whose notice was missed. */
async function listenForCancels(
	{ db, sql }: Connection,
	running: ReadonlyMap<string, AbortController>
): Promise<() => Promise<unknown>> {
	const catchUp = async () => {
		if (running.size === 0) return;
		const ended = await db
			.select({ id: jobs.id })
			.from(jobs)
			.where(and(inArray(jobs.id, [...running.keys()]), notInArray(jobs.state, [...UNFINISHED])));
		for (const { id } of ended) running.get(id)?.abort(CANCELLED);
	};
	const { unlisten } = await sql.listen(
		CANCEL_CHANNEL,
		(jobId) => running.get(jobId)?.abort(CANCELLED),
		() => {
			catchUp().catch((error: unknown) => log.warn({ error }, 'missed cancellations not read'));
		}
	);
	return unlisten;
}
