import { z } from 'zod';
import { jobSchema } from './jobs.ts';
import { REVISION_STATES } from './revisions.ts';

/** What a floorplan's event stream carries. */
export const floorplanEventSchema = z.discriminatedUnion('type', [
	/** Somebody's edit made this version. */
	z.object({ type: z.literal('edit'), version: z.int(), by: z.string(), editId: z.uuid() }),
	/** A job of this floorplan changed. */
	z.object({ type: z.literal('job'), job: jobSchema }),
	/** A result was kept. */
	z.object({
		type: z.literal('result'),
		id: z.uuid(),
		mode: z.string(),
		corner: z.string(),
		documentHash: z.string()
	}),
	/** A revision was frozen, or moved on to another state. */
	z.object({
		type: z.literal('revision'),
		id: z.uuid(),
		number: z.int(),
		state: z.enum(REVISION_STATES)
	}),
	/** A thread was opened, written in, resolved or reopened. */
	z.object({ type: z.literal('thread'), id: z.uuid(), revisionId: z.uuid().nullable() })
]);
export type FloorplanEvent = z.infer<typeof floorplanEventSchema>;
