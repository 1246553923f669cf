import { z } from 'zod';
import { ITEM_LISTS } from '#lib/floorplan/index.ts';
import { personSchema } from './revisions.ts';

const atSchema = z.iso.datetime({ offset: true });
const atUmSchema = z.tuple([z.number(), z.number()]);

/** What a thread is about when it is opened: an object, a place, or the plan as a whole. */
export const anchorInputSchema = z.discriminatedUnion('kind', [
	z.strictObject({
		kind: z.literal('item'),
		list: z.enum(ITEM_LISTS),
		id: z.string().min(1).max(64)
	}),
	z.strictObject({ kind: z.literal('place'), xUm: z.number(), yUm: z.number() }),
	z.strictObject({ kind: z.literal('plan') })
]);
export type AnchorInput = z.infer<typeof anchorInputSchema>;

/** What a thread is about, where it is now. */
export const anchorSchema = z.discriminatedUnion('kind', [
	z.object({
		kind: z.literal('item'),
		list: z.enum(ITEM_LISTS),
		id: z.string(),
		/** Middle of the object, or its last place once it is deleted; null for what stands nowhere. */
		atUm: atUmSchema.nullable(),
		/** False once the object is deleted; the thread stays, and comes back to it with an undo. */
		isPresent: z.boolean()
	}),
	z.object({ kind: z.literal('place'), atUm: atUmSchema }),
	z.object({ kind: z.literal('plan') })
]);
export type ThreadAnchor = z.infer<typeof anchorSchema>;

const commentTextSchema = z
	.string()
	.trim()
	.min(1, 'Write something')
	.max(10_000, 'At most 10,000 characters');

export const openThreadSchema = z.strictObject({
	anchor: anchorInputSchema,
	text: commentTextSchema
});
export type OpenThread = z.infer<typeof openThreadSchema>;

export const addCommentSchema = z.strictObject({ text: commentTextSchema });

/** A deleted comment keeps its place, author and time; its words are gone. */
export const commentSchema = z.object({
	id: z.uuid(),
	by: personSchema,
	at: atSchema,
	text: z.string().nullable(),
	deletedAt: atSchema.nullable()
});
export type ThreadComment = z.infer<typeof commentSchema>;

export const threadSchema = z.object({
	id: z.uuid(),
	floorplanId: z.uuid(),
	/** The revision that it is about; null for the draft. */
	revisionId: z.uuid().nullable(),
	anchor: anchorSchema,
	openedBy: personSchema,
	openedAt: atSchema,
	isResolved: z.boolean(),
	/** Resolved and reopened by whom and when, in order. */
	history: z.array(
		z.object({ act: z.enum(['resolve', 'reopen']), by: personSchema, at: atSchema })
	),
	/** In the order in which they were written; the first opened the thread. */
	comments: z.array(commentSchema)
});
export type Thread = z.infer<typeof threadSchema>;

export const threadListSchema = z.object({
	/** The newest first, resolved ones among them. */
	threads: z.array(threadSchema)
});
