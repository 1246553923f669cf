import { and, desc, eq, lte } from 'drizzle-orm';
import type { FindingStatus, RevisionFinding, RevisionFindings } from '#lib/contracts/index.ts';
import { requireAccess } from '../access/access.ts';
import type { Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { revisionFindings, revisions } from '../db/schema/index.ts';
import { resultsOf } from './revision-results.ts';
import { findRevision } from './revision-rows.ts';

type FindingRow = typeof revisionFindings.$inferSelect;

/** What makes a finding the same over the revisions of a floorplan. */
function identityOf({ kind, list, subject, partner, mode, corner }: FindingRow): string {
	return JSON.stringify([kind, list, subject, partner, mode, corner]);
}

function toFinding(
	{ revisionId: _revision, partner, xUm, yUm, ...row }: FindingRow,
	status: FindingStatus,
	before: RevisionFinding['before']
): RevisionFinding {
	const atUm: RevisionFinding['atUm'] = xUm === null || yUm === null ? null : [xUm, yUm];
	return { ...row, partner: partner === '' ? null : partner, atUm, status, before };
}

/**
 * The findings of a revision against the one before it: new, still there, come back after they were
 * gone; and those that are gone since. Where a mode and corner has no result yet, nothing of it
 * counts as gone.
 */
export async function getFindings(
	db: Handle,
	actor: Actor,
	revisionId: string
): Promise<RevisionFindings> {
	await requireAccess(db, actor, 'project.view', { kind: 'revision', id: revisionId });
	const revision = await findRevision(db, revisionId);
	const rows = await db
		.select({ finding: revisionFindings, number: revisions.number })
		.from(revisionFindings)
		.innerJoin(revisions, eq(revisions.id, revisionFindings.revisionId))
		.where(
			and(eq(revisions.floorplanId, revision.floorplanId), lte(revisions.number, revision.number))
		)
		.orderBy(desc(revisions.number), revisionFindings.mode, revisionFindings.corner);
	const [previous] = await db
		.select({ number: revisions.number })
		.from(revisions)
		.where(
			and(
				eq(revisions.floorplanId, revision.floorplanId),
				lte(revisions.number, revision.number - 1)
			)
		)
		.orderBy(desc(revisions.number))
		.limit(1);
	const against = previous?.number ?? null;
	const results = await resultsOf(db, revision);
	const unsolved = new Set(
		results.flatMap(({ state, mode, corner }) =>
			state === 'complete' ? [] : [JSON.stringify([mode, corner])]
		)
	);

	/** Of each identity the newest earlier revision that has it; rows come newest first. */
	const last = new Map<string, (typeof rows)[number]>();
	for (const row of rows) {
		if (row.number === revision.number) continue;
		const identity = identityOf(row.finding);
		if (!last.has(identity)) last.set(identity, row);
	}
	const present = rows.filter(({ number }) => number === revision.number);
	const listed = present.map(({ finding }) => {
		const earlier = last.get(identityOf(finding));
		if (!earlier) return toFinding(finding, 'new', null);
		const { value, limit } = earlier.finding;
		const status = earlier.number === against ? 'still-there' : 'come-back';
		return toFinding(finding, status, { number: earlier.number, value, limit });
	});
	const identities = new Set(present.map(({ finding }) => identityOf(finding)));
	const gone = rows
		.filter(
			({ number, finding }) =>
				number === against &&
				!identities.has(identityOf(finding)) &&
				!unsolved.has(JSON.stringify([finding.mode, finding.corner]))
		)
		.map(({ finding, number }) => {
			const { value, limit } = finding;
			return toFinding(finding, 'gone', { number, value, limit });
		});
	return { against, isComplete: unsolved.size === 0, findings: [...listed, ...gone] };
}
