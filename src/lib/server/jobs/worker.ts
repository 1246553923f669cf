import { EventEmitter } from 'node:events';
import { Logger, run, type Runner } from 'graphile-worker';
import { z } from 'zod';
import type { Connection } from '../db/client.ts';
import { CANCEL_CHANNEL } from '../events/publish.ts';
import { log } from '../log.ts';
import { TASK } from './enqueue.ts';
import { CANCELLED, STOPPING } from './job-kind.ts';
import { WorkerPresence } from './presence.ts';
import { runJob, type JobRegistry } from './run-job.ts';

const payloadSchema = z.object({ jobId: z.uuid() });

/** The queue is asked at least this often; normally a notification comes first. */
const POLL_INTERVAL_MS = 2000;

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
	const { db, sql } = connection;
	const running = new Map<string, AbortController>();
	const presence = new WorkerPresence(url, db);
	const { unlisten } = await sql.listen(CANCEL_CHANNEL, (jobId) =>
		running.get(jobId)?.abort(CANCELLED)
	);
	const queueWorkerIds: string[] = [];
	const runner: Runner = await run({
		connectionString: url,
		concurrency: 1,
		pollInterval: POLL_INTERVAL_MS,
		noHandleSignals: true,
		logger: new Logger(() => (level, message) => {
			if (level === 'error' || level === 'warning') log.warn({ queue: message }, 'queue');
		}),
		taskList: {
			[TASK]: async (payload, helpers) => {
				const { jobId } = payloadSchema.parse(payload);
				const abort = new AbortController();
				running.set(jobId, abort);
				const isLastAttempt = helpers.job.attempts >= helpers.job.max_attempts;
				try {
					await runJob(db, kinds, jobId, abort.signal, isLastAttempt);
				} finally {
					running.delete(jobId);
				}
			}
		},
		events: workerEvents((id) => queueWorkerIds.push(id))
	});
	await presence.join(queueWorkerIds);
	return {
		async stop() {
			for (const abort of running.values()) abort.abort(STOPPING);
			await runner.stop();
			await unlisten();
			await presence.leave();
		}
	};
}

/** An emitter that tells the ids of the queue's workers as they are made. */
function workerEvents(onWorker: (id: string) => void) {
	const events: NonNullable<Parameters<typeof run>[0]['events']> = new EventEmitter();
	events.on('worker:create', ({ worker }) => onWorker(worker.workerId));
	return events;
}
