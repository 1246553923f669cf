import { and, eq, inArray, sql } from 'drizzle-orm';
import { jobFailureSchema, type JobFailure, type JobState } from '#lib/contracts/jobs.ts';
import type { Database, Handle } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { log, loggable } from '../log.ts';
import { addToQueue } from './enqueue.ts';
import { CANCELLED, JobRefused, STOPPING, type JobKind } from './job-kind.ts';
import { UNFINISHED, type JobRow } from './job-rows.ts';

/** Progress is written and told at most this often. */
const PROGRESS_INTERVAL_MS = 250;

// Kinds differ in their input and result; each parses its own input before it runs.
type AnyJobKind = JobKind<unknown, unknown>;
export type JobRegistry = ReadonlyMap<string, AnyJobKind>;

export function registry(kinds: readonly AnyJobKind[]): JobRegistry {
	return new Map(kinds.map((kind) => [kind.kind, kind]));
}

async function tell(db: Handle, { floorplanId, id }: JobRow): Promise<void> {
	if (floorplanId) await publish(db, { type: 'job', floorplanId, jobId: id });
}

/** Takes the next attempt of a job; null where it was cancelled or is done already. */
async function beginAttempt(db: Database, jobId: string): Promise<JobRow | null> {
	return db.transaction(async (tx) => {
		const [row] = await tx
			.update(jobs)
			.set({
				state: 'running',
				phase: 'starting',
				progress: 0,
				attempt: sql`${jobs.attempt} + 1`,
				startedAt: new Date()
			})
			.where(and(eq(jobs.id, jobId), inArray(jobs.state, UNFINISHED)))
			.returning();
		if (row) await tell(tx, row);
		return row ?? null;
	});
}

/** Ends the attempt if it is still the job's own: a late one changes nothing. Returns whether it was. */
async function endAttempt(
	db: Handle,
	job: JobRow,
	state: Exclude<JobState, 'running'>,
	failure: JobFailure | null = null
): Promise<boolean> {
	const [row] = await db
		.update(jobs)
		.set({
			state,
			failure,
			phase: '',
			progress: state === 'done' ? 1 : 0,
			finishedAt: state === 'queued' ? null : new Date()
		})
		.where(and(eq(jobs.id, job.id), eq(jobs.attempt, job.attempt), eq(jobs.state, 'running')))
		.returning();
	if (row) await tell(db, row);
	return row !== undefined;
}

/** Writes progress now and then; the last call of a burst is never lost. */
function progressWriter(db: Database, job: JobRow) {
	let pending: { phase: string; fraction: number } | undefined;
	let timer: NodeJS.Timeout | undefined;
	const write = async () => {
		timer = undefined;
		const latest = pending;
		pending = undefined;
		if (!latest) return;
		await db
			.update(jobs)
			.set({ phase: latest.phase, progress: latest.fraction })
			.where(and(eq(jobs.id, job.id), eq(jobs.attempt, job.attempt), eq(jobs.state, 'running')));
		await tell(db, job);
	};
	return {
		report(phase: string, fraction: number) {
			pending = { phase, fraction };
			timer ??= setTimeout(() => {
				write().catch((error: unknown) => log.warn({ error, job: job.id }, 'progress not written'));
			}, PROGRESS_INTERVAL_MS);
		},
		stop() {
			clearTimeout(timer);
			pending = undefined;
		}
	};
}

/**
 * Does one attempt of a job. Returns when the job has ended in whatever way a person should see;
 * throws when the surroundings failed, so that the queue tries again later.
 *
 * @param isLastAttempt no further attempt follows: a failure of the surroundings ends the job too
 */
export async function runJob(
	db: Database,
	kinds: JobRegistry,
	jobId: string,
	signal: AbortSignal,
	isLastAttempt: boolean
): Promise<void> {
	const job = await beginAttempt(db, jobId);
	if (!job) return;
	const progress = progressWriter(db, job);
	try {
		const kind = kinds.get(job.kind);
		if (!kind)
			throw new JobRefused({ message: `There is no work of kind ${job.kind}.`, problems: [] });
		const input = parseInput(kind, job.input);
		const result = await kind.run(input, {
			db,
			job,
			signal,
			progress: (phase, fraction) => progress.report(phase, fraction)
		});
		progress.stop();
		await db.transaction(async (tx) => {
			if (await endAttempt(tx, job, 'done')) await kind.store(tx, input, result, job);
		});
	} catch (error) {
		progress.stop();
		if (error instanceof JobRefused) {
			await endAttempt(db, job, 'failed', jobFailureSchema.parse(error.failure));
			return;
		}
		if (signal.reason === CANCELLED) return;
		if (signal.reason === STOPPING) {
			// Not the job's fault: it goes back with all its attempts, and its turn comes first.
			await db.transaction(async (tx) => {
				if (await endAttempt(tx, job, 'queued')) await addToQueue(tx, job.id, 0);
			});
			return;
		}
		if (isLastAttempt) {
			log.error({ error, job: job.id }, 'job given up');
			await endAttempt(db, job, 'failed', {
				message: `The work failed ${job.attempt} times for reasons outside the plan and was given up. Start it again, or tell an administrator.`,
				problems: []
			});
			return;
		}
		await endAttempt(db, job, 'queued');
		// The queue keeps and logs the text: without the values of a query.
		throw new Error(String(loggable(error).message), { cause: error });
	} finally {
		progress.stop();
	}
}

function parseInput(kind: AnyJobKind, input: unknown): unknown {
	const parsed = kind.input.safeParse(input);
	if (parsed.success) return parsed.data;
	throw new JobRefused({
		message: 'The job was made by another version and cannot be read. Start it again.',
		problems: []
	});
}
