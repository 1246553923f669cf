import { sql } from 'drizzle-orm';
import { z } from 'zod';
import { REVISION_STATES } from '#lib/contracts/index.ts';
import type { Handle } from '../db/client.ts';

/** Channel on which every process hears what changed. */
export const EVENTS_CHANNEL = 'manyweir_events';
/** Channel on which workers hear that a running job is no longer wanted. */
export const CANCEL_CHANNEL = 'manyweir_cancel';

/** What is sent between processes: ids only, since a notification holds at most 8,000 bytes. */
export const noticeSchema = z.discriminatedUnion('type', [
	z.object({
		type: z.literal('edit'),
		floorplanId: z.string(),
		version: z.int(),
		by: z.string(),
		editId: z.string()
	}),
	z.object({ type: z.literal('job'), floorplanId: z.string(), jobId: z.string() }),
	z.object({
		type: z.literal('result'),
		floorplanId: z.string(),
		id: z.string(),
		mode: z.string(),
		corner: z.string(),
		documentHash: z.string()
	}),
	z.object({
		type: z.literal('revision'),
		floorplanId: z.string(),
		id: z.string(),
		number: z.int(),
		state: z.enum(REVISION_STATES)
	}),
	z.object({
		type: z.literal('thread'),
		floorplanId: z.string(),
		id: z.string(),
		revisionId: z.string().nullable()
	})
]);
export type Notice = z.infer<typeof noticeSchema>;

/** Tells every process; within a transaction it is sent when that commits. */
export async function publish(db: Handle, notice: Notice): Promise<void> {
	await db.execute(sql`select pg_notify(${EVENTS_CHANNEL}, ${JSON.stringify(notice)})`);
}

/** Tells the workers that a job was cancelled. */
export async function publishCancel(db: Handle, jobId: string): Promise<void> {
	await db.execute(sql`select pg_notify(${CANCEL_CHANNEL}, ${jobId})`);
}
