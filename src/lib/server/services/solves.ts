import { and, count, eq, inArray, sql } from 'drizzle-orm';
import type { z } from 'zod';
import type { Job, requestSolvesSchema, Solves } from '#lib/contracts/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Database, Handle } from '../db/client.ts';
import { documents, floorplans, jobs, resultMaps, results } from '../db/schema/index.ts';
import { cancelJob, cancelSuperseded } from '../jobs/cancel.ts';
import { enqueue } from '../jobs/enqueue.ts';
import { findJob, listJobs, UNFINISHED } from '../jobs/job-rows.ts';
import { SOLVE_KIND, solveDedupeKey } from '../jobs/solve-kind.ts';
import { Problem } from '../problem.ts';

/** Modes and corners that one request may ask for. */
const MAX_COMBINATIONS = 64;
/** Unfinished jobs that one team may have. */
const MAX_UNFINISHED = 256;
const RETRY_SECONDS = 30;

/**
 * Kept results and jobs of a floorplan. Of each mode and corner the result of the present document
 * where there is one, else the newest of the project, which the page then marks as out of date.
 */
export async function getSolves(db: Handle, actor: Actor, id: string): Promise<Solves> {
	const access = await requireAccess(db, actor, 'project.view', { kind: 'floorplan', id });
	const [{ hash }] = await db
		.select({ hash: floorplans.hash })
		.from(floorplans)
		.where(eq(floorplans.id, id));
	const solvedHere = sql`(${results.documentHash} = ${hash} or ${results.documentHash} in (
		select j.input ->> 'documentHash' from jobs j where j.floorplan_id = ${id} and j.state = 'done'))`;
	const rows = await db
		.selectDistinctOn([results.mode, results.corner], {
			id: results.id,
			mode: results.mode,
			corner: results.corner,
			documentHash: results.documentHash,
			createdAt: results.createdAt
		})
		.from(results)
		.where(
			and(
				eq(results.projectId, access.projectId ?? ''),
				eq(results.solverVersion, SOLVER_VERSION),
				solvedHere
			)
		)
		.orderBy(
			results.mode,
			results.corner,
			sql`(${results.documentHash} = ${hash}) desc`,
			sql`${results.createdAt} desc`
		);
	return {
		documentHash: hash,
		results: rows.map((row) => ({ ...row, createdAt: row.createdAt.toISOString() })),
		jobs: await listJobs(db, id)
	};
}

/** Starts the solves that are asked for and not kept already. */
export async function requestSolves(
	db: Database,
	actor: Actor,
	id: string,
	wanted: z.output<typeof requestSolvesSchema>
): Promise<Solves> {
	const access = await requireAccess(db, actor, 'solve.run', { kind: 'floorplan', id });
	const projectId = access.projectId ?? '';
	await db.transaction(async (tx) => {
		const [{ hash, document }] = await tx.select().from(floorplans).where(eq(floorplans.id, id));
		const modes = pick('mode', document.modes, wanted.mode);
		const corners = pick('corner', document.corners, wanted.corner);
		const combinations = modes.flatMap((mode) => corners.map((corner) => ({ mode, corner })));
		if (combinations.length > MAX_COMBINATIONS) {
			throw new Problem(
				'invalid',
				`${combinations.length} modes and corners at once (at most ${MAX_COMBINATIONS}). Ask for one mode or corner.`
			);
		}
		await enqueueMissing(tx, actor, { projectId, floorplanId: id, hash, document }, combinations);
	});
	return getSolves(db, actor, id);
}

export interface SolvedDocument {
	readonly projectId: string;
	readonly floorplanId: string;
	readonly hash: string;
	readonly document: Floorplan;
}

/** Enqueues the solves of a document that are not kept yet, within the caller's transaction. */
export async function enqueueMissing(
	tx: Handle,
	actor: Actor,
	{ projectId, floorplanId, hash, document }: SolvedDocument,
	combinations: readonly { readonly mode: string; readonly corner: string }[]
): Promise<void> {
	const kept = await tx
		.select({ mode: results.mode, corner: results.corner })
		.from(results)
		.where(
			and(
				eq(results.projectId, projectId),
				eq(results.documentHash, hash),
				eq(results.solverVersion, SOLVER_VERSION)
			)
		);
	const missing = combinations.filter(
		({ mode, corner }) => !kept.some((one) => one.mode === mode && one.corner === corner)
	);
	if (missing.length > 0) {
		await requireRoom(tx, actor.teamId, missing.length);
		await tx.insert(documents).values({ projectId, hash, document }).onConflictDoNothing();
	}
	for (const { mode, corner } of missing) {
		const input = { projectId, floorplanId, documentHash: hash, mode, corner };
		await cancelSuperseded(tx, input);
		const job = await enqueue(tx, {
			kind: SOLVE_KIND,
			input,
			dedupeKey: solveDedupeKey(input),
			teamId: actor.teamId,
			floorplanId,
			requestedBy: actor.userId
		});
		await audit(tx, {
			teamId: actor.teamId,
			userId: actor.userId,
			requestId: actor.requestId,
			action: 'solve.request',
			objectKind: 'job',
			objectId: job.id,
			detail: { floorplanId, mode, corner }
		});
	}
}

/** Refuses more work of a team than can be looked through. */
async function requireRoom(db: Handle, teamId: string, more: number): Promise<void> {
	const [{ unfinished }] = await db
		.select({ unfinished: count() })
		.from(jobs)
		.where(and(eq(jobs.teamId, teamId), inArray(jobs.state, UNFINISHED)));
	if (unfinished + more <= MAX_UNFINISHED) return;
	throw new Problem(
		'too-many',
		`Your team has ${unfinished} unfinished jobs (at most ${MAX_UNFINISHED}). Wait until some are done, or cancel some.`,
		{ retryAfterSeconds: RETRY_SECONDS }
	);
}

function pick(what: string, list: readonly { id: string }[], wanted?: string): string[] {
	const ids = list.map(({ id }) => id);
	if (wanted === undefined) return ids;
	if (ids.includes(wanted)) return [wanted];
	const message = `There is no ${what} "${wanted}" (there are ${ids.join(', ')}).`;
	throw new Problem('invalid', message, { errors: [{ path: what, message }] });
}

export async function getJob(db: Handle, actor: Actor, id: string): Promise<Job> {
	await requireAccess(db, actor, 'project.view', { kind: 'job', id });
	const job = await findJob(db, id);
	if (!job) throw new Problem('not-found', 'There is no such job.');
	return job;
}

/** Cancels a job; one that has ended stays as it is. */
export async function cancel(db: Database, actor: Actor, id: string): Promise<Job> {
	await requireAccess(db, actor, 'solve.run', { kind: 'job', id });
	await cancelJob(db, id);
	await audit(db, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action: 'job.cancel',
		objectKind: 'job',
		objectId: id
	});
	return getJob(db, actor, id);
}

export async function getResult(db: Handle, actor: Actor, id: string): Promise<ResultFile> {
	await requireAccess(db, actor, 'project.view', { kind: 'result', id });
	const [row] = await db.select({ file: results.file }).from(results).where(eq(results.id, id));
	return row.file;
}

/** The drop map of one net, compressed with gzip. */
export async function getMap(
	db: Handle,
	actor: Actor,
	id: string,
	net: string
): Promise<Uint8Array> {
	await requireAccess(db, actor, 'project.view', { kind: 'result', id });
	const [row] = await db
		.select({ gzip: resultMaps.gzip })
		.from(resultMaps)
		.where(and(eq(resultMaps.resultId, id), eq(resultMaps.net, net)));
	if (!row) throw new Problem('not-found', `The result has no map of net ${net}.`);
	return row.gzip;
}
