import { z } from 'zod';

export const JOB_STATES = ['queued', 'running', 'done', 'failed', 'cancelled'] as const;
export type JobState = (typeof JOB_STATES)[number];

/** Why a job failed, and where in the floorplan that can be mended. */
export const jobFailureSchema = z.object({
	message: z.string(),
	problems: z.array(
		z.object({
			path: z.string(),
			message: z.string(),
			subject: z.string().optional(),
			atUm: z.tuple([z.number(), z.number()]).optional()
		})
	)
});
export type JobFailure = z.infer<typeof jobFailureSchema>;

export const jobSchema = z.object({
	id: z.uuid(),
	kind: z.string(),
	state: z.enum(JOB_STATES),
	/** What it is doing now, in a word or two. */
	phase: z.string(),
	/** Part done, 0 to 1. */
	progress: z.number(),
	/** How many jobs wait before it; 0 once it runs. */
	ahead: z.int(),
	attempt: z.int(),
	failure: jobFailureSchema.nullable(),
	floorplanId: z.uuid().nullable(),
	/** Of a solve. */
	mode: z.string().nullable(),
	corner: z.string().nullable(),
	documentHash: z.string().nullable(),
	createdAt: z.iso.datetime({ offset: true }),
	finishedAt: z.iso.datetime({ offset: true }).nullable()
});
export type Job = z.infer<typeof jobSchema>;

export function isFinished({ state }: Pick<Job, 'state'>): boolean {
	return state === 'done' || state === 'failed' || state === 'cancelled';
}
