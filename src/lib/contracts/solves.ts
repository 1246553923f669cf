import { z } from 'zod';
import { jobSchema } from './jobs.ts';

/** Asks for one mode and corner, or for all combinations of what is left out. */
export const requestSolvesSchema = z.strictObject({
	mode: z.string().max(64).optional(),
	corner: z.string().max(64).optional()
});

/** A kept result at a glance. */
export const resultSummarySchema = z.object({
	id: z.uuid(),
	mode: z.string(),
	corner: z.string(),
	documentHash: z.string(),
	createdAt: z.iso.datetime({ offset: true })
});
export type ResultSummary = z.infer<typeof resultSummarySchema>;

export const solvesSchema = z.object({
	/** Hash of the document as it stands: results of another hash are out of date. */
	documentHash: z.string(),
	/** Newest kept result of each mode and corner, of this document where there is one. */
	results: z.array(resultSummarySchema),
	/** Jobs of this floorplan that are not finished, and the newest finished one of each kind of input. */
	jobs: z.array(jobSchema)
});
export type Solves = z.infer<typeof solvesSchema>;
