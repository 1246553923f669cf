import { and, eq, inArray, sql } from 'drizzle-orm';
import type { Database } from '../db/client.ts';
import { jobs } from '../db/schema/index.ts';
import { publish, publishCancel } from '../events/publish.ts';

/**
 * Cancels a job: a waiting one leaves the queue, a running one is stopped by its worker. Its state
 * changes at once, so nothing that the worker still finishes is stored. A finished job stays as it is.
 */
export async function cancelJob(db: Database, jobId: string): Promise<void> {
	await db.transaction(async (tx) => {
		const [row] = await tx
			.update(jobs)
			.set({ state: 'cancelled', phase: '', progress: 0, finishedAt: new Date() })
			.where(and(eq(jobs.id, jobId), inArray(jobs.state, ['queued', 'running'])))
			.returning();
		if (!row) return;
		await tx.execute(sql`select graphile_worker.remove_job(${jobId})`);
		await publishCancel(tx, jobId);
		if (row.floorplanId) await publish(tx, { type: 'job', floorplanId: row.floorplanId, jobId });
	});
}
