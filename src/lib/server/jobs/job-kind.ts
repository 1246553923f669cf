import type { z } from 'zod';
import type { JobFailure } from '#lib/contracts/index.ts';
import type { Database, Handle } from '../db/client.ts';
import type { JobRow } from './job-rows.ts';

/** Reasons for which a running job's signal is aborted. */
export const CANCELLED = 'cancelled';
export const STOPPING = 'stopping';

/** What a running job is given. */
export interface JobContext {
	readonly db: Database;
	readonly job: JobRow;
	/** Aborted when the job was cancelled or the worker stops. */
	readonly signal: AbortSignal;
	/** Tells how far it is; calls in quick succession are merged. */
	progress(phase: string, fraction: number): void;
}

/**
 * A kind of background work: what it needs, and how it is done. Work may run twice (a worker can die
 * after the work and before its record), so the outcome is only stored through `store`, which runs
 * in the transaction that also ends the job, and only when this attempt is still the job's own.
 */
export interface JobKind<Input, Result> {
	readonly kind: string;
	readonly input: z.ZodType<Input>;
	run(input: Input, context: JobContext): Promise<Result>;
	store(db: Handle, input: Input, result: Result, job: JobRow): Promise<void>;
}

/** The work cannot be done whatever the attempt: the input is at fault, and says how. */
export class JobRefused extends Error {
	override readonly name = 'JobRefused';
	readonly failure: JobFailure;

	constructor(failure: JobFailure) {
		super(failure.message);
		this.failure = failure;
	}
}
