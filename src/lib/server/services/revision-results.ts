import { eq } from 'drizzle-orm';
import type { RevisionResult, RevisionSummary } from '#lib/contracts/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Handle } from '../db/client.ts';
import { results, revisionResults, revisions } from '../db/schema/index.ts';
import { listSolves } from '../jobs/job-rows.ts';

/** Every mode and corner of a document, in its order. */
export function combinationsOf({ modes, corners }: Floorplan): { mode: string; corner: string }[] {
	return modes.flatMap((mode) => corners.map((corner) => ({ mode: mode.id, corner: corner.id })));
}

/** How far the results of a revision are, mode by mode. */
export async function resultsOf(
	db: Handle,
	{ id, floorplanId, hash }: Pick<RevisionSummary, 'id' | 'floorplanId' | 'hash'>
): Promise<RevisionResult[]> {
	const [{ document }] = await db
		.select({ document: revisions.document })
		.from(revisions)
		.where(eq(revisions.id, id));
	const bound = await db
		.select({
			mode: revisionResults.mode,
			corner: revisionResults.corner,
			resultId: results.id,
			figures: results.figures
		})
		.from(revisionResults)
		.innerJoin(results, eq(results.id, revisionResults.resultId))
		.where(eq(revisionResults.revisionId, id));
	const jobs = await listSolves(db, floorplanId, hash);
	return combinationsOf(document).map(({ mode, corner }): RevisionResult => {
		const isIt = (one: { mode: string | null; corner: string | null }) =>
			one.mode === mode && one.corner === corner;
		const result = bound.find(isIt);
		if (result) {
			const { resultId, figures } = result;
			return { mode, corner, state: 'complete', resultId, ...figures, job: null };
		}
		const job = jobs.find(isIt) ?? null;
		const isUnderWay = job?.state === 'queued' || job?.state === 'running';
		const state = isUnderWay ? 'under-way' : job?.state === 'failed' ? 'failed' : 'missing';
		return {
			mode,
			corner,
			state,
			resultId: null,
			worstDropV: null,
			worstMarginV: null,
			findings: null,
			job
		};
	});
}
