import { z } from 'zod';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { editSchema } from '#lib/floorplan/edits/index.ts';
import { PROJECT_ROLES } from './roles.ts';

/**
 * A draft with its document. The server only ever stores parsed documents, so the page trusts the
 * shape instead of parsing hundreds of kilobytes again.
 */
export const floorplanDetailSchema = z.object({
	id: z.uuid(),
	projectId: z.uuid(),
	projectName: z.string(),
	name: z.string(),
	version: z.int(),
	hash: z.string(),
	document: z.custom<Floorplan>((value) => typeof value === 'object' && value !== null),
	role: z.enum(PROJECT_ROLES).nullable(),
	updatedAt: z.iso.datetime({ offset: true }),
	updatedBy: z.string()
});
export type FloorplanDetail = z.infer<typeof floorplanDetailSchema>;

export const submitEditSchema = editSchema.extend({
	/** Version that the author saw. */
	baseVersion: z.int().nonnegative()
});
export type SubmitEdit = z.infer<typeof submitEditSchema>;

export const editAcceptedSchema = z.object({ version: z.int(), hash: z.string() });
export type EditAccepted = z.infer<typeof editAcceptedSchema>;

export const recordedEditSchema = editSchema.extend({
	version: z.int(),
	by: z.string(),
	userId: z.uuid(),
	at: z.iso.datetime({ offset: true })
});
export type RecordedEdit = z.infer<typeof recordedEditSchema>;

export const editsPageSchema = z.object({
	edits: z.array(recordedEditSchema),
	/** Version after the last edit of this page. */
	version: z.int(),
	hasMore: z.boolean()
});
export type EditsPage = z.infer<typeof editsPageSchema>;

/** One place where two people changed the same thing; carried by a 409 problem as `conflicts`. */
export const conflictSchema = z.object({
	operation: z.int(),
	list: z.string().optional(),
	id: z.string().optional(),
	property: z.string().optional(),
	field: z.string().optional(),
	mine: z.unknown().optional(),
	theirs: z.unknown().optional(),
	reason: z.enum(['changed', 'gone', 'taken']),
	/** Who changed it last, as far as the history since the author's version tells. */
	by: z.string().nullable(),
	at: z.string().nullable()
});
export type EditConflict = z.infer<typeof conflictSchema>;
