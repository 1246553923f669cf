import { and, eq, inArray, ne, notExists, sql } from 'drizzle-orm';
import type { Handle } from '../db/client.ts';
import { jobs, revisions } from '../db/schema/index.ts';
import { publish, publishCancel } from '../events/publish.ts';
import { UNFINISHED } from './job-rows.ts';
import { SOLVE_KIND } from './solve-kind.ts';

/**
 * Cancels a job: a waiting one leaves the queue, a running one is stopped by its worker. Its state
 * changes at once, so nothing that the worker still finishes is stored. A finished job stays as it is.
 */
export async function cancelJob(db: Handle, jobId: string): Promise<void> {
	await db.transaction(async (tx) => {
		const [row] = await tx
			.update(jobs)
			.set({ state: 'cancelled', phase: '', progress: 0, finishedAt: new Date() })
			.where(and(eq(jobs.id, jobId), inArray(jobs.state, UNFINISHED)))
			.returning();
		if (!row) return;
		await tx.execute(sql`select graphile_worker.remove_job(${jobId})`);
		await publishCancel(tx, jobId);
		if (row.floorplanId) await publish(tx, { type: 'job', floorplanId: row.floorplanId, jobId });
	});
}

/**
 * Cancels solves of older documents of a floorplan that still wait: a newer one of the same mode and
 * corner takes their place. Those of a revision stay: it is never complete without them.
 */
export async function cancelSuperseded(
	db: Handle,
	wanted: { floorplanId: string; documentHash: string; mode: string; corner: string }
): Promise<void> {
	const waiting = await db
		.select({ id: jobs.id })
		.from(jobs)
		.where(
			and(
				eq(jobs.kind, SOLVE_KIND),
				eq(jobs.floorplanId, wanted.floorplanId),
				eq(jobs.state, 'queued'),
				eq(sql`${jobs.input} ->> 'mode'`, wanted.mode),
				eq(sql`${jobs.input} ->> 'corner'`, wanted.corner),
				ne(sql`${jobs.input} ->> 'documentHash'`, wanted.documentHash),
				notExists(
					db
						.select({ id: revisions.id })
						.from(revisions)
						.where(
							and(
								eq(revisions.floorplanId, wanted.floorplanId),
								eq(revisions.hash, sql`${jobs.input} ->> 'documentHash'`)
							)
						)
				)
			)
		);
	for (const { id } of waiting) await cancelJob(db, id);
}
