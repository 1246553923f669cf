import { and, eq, isNull, sql } from 'drizzle-orm';
import type { Finding } from '#lib/results/index.ts';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import type { Handle } from '../db/client.ts';
import {
	floorplans,
	results,
	revisionFindings,
	revisionResults,
	revisions
} from '../db/schema/index.ts';

/** Columns of a finding in one statement stay below the limit of the protocol. */
const ROWS_AT_ONCE = 1000;

/**
 * Gives revisions of a document the results that they do not have yet, and writes down their
 * findings. Called in the transaction that keeps a result, and in the one that freezes a revision:
 * they take turns, so that whichever comes second finds what the first has left.
 */
export async function bindResults(db: Handle, projectId: string, hash: string): Promise<void> {
	await db.execute(
		sql`select pg_advisory_xact_lock(hashtextextended(${`${projectId}:${hash}`}, 0))`
	);
	const unbound = await db
		.select({
			revisionId: revisions.id,
			resultId: results.id,
			mode: results.mode,
			corner: results.corner,
			findings: sql<Finding[]>`${results.file} -> 'findings'`
		})
		.from(revisions)
		.innerJoin(floorplans, eq(floorplans.id, revisions.floorplanId))
		.innerJoin(
			results,
			and(
				eq(results.projectId, floorplans.projectId),
				eq(results.documentHash, revisions.hash),
				eq(results.solverVersion, SOLVER_VERSION)
			)
		)
		.leftJoin(
			revisionResults,
			and(
				eq(revisionResults.revisionId, revisions.id),
				eq(revisionResults.mode, results.mode),
				eq(revisionResults.corner, results.corner)
			)
		)
		.where(
			and(
				eq(floorplans.projectId, projectId),
				eq(revisions.hash, hash),
				isNull(revisionResults.resultId)
			)
		);
	if (unbound.length === 0) return;
	await db.insert(revisionResults).values(
		unbound.map(({ revisionId, resultId, mode, corner }) => ({
			revisionId,
			resultId,
			mode,
			corner
		}))
	);
	const found = unbound.flatMap(({ revisionId, mode, corner, findings }) =>
		findings.map(({ partner = '', atUm, ...finding }) => ({
			...finding,
			revisionId,
			mode,
			corner,
			partner,
			xUm: atUm?.[0],
			yUm: atUm?.[1]
		}))
	);
	for (let first = 0; first < found.length; first += ROWS_AT_ONCE) {
		await db.insert(revisionFindings).values(found.slice(first, first + ROWS_AT_ONCE));
	}
}
