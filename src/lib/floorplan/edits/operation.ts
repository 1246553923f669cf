import { z } from 'zod';
import { isPlainJson } from '../canonical.ts';
import { ITEM_LISTS, type ItemList } from '../document.ts';
import { idSchema } from '../primitives.ts';

/** The properties of a document that are not lists. */
export const PROPERTIES = ['name', 'die', 'sites', 'stack', 'limits', 'mesh'] as const;
export type Property = (typeof PROPERTIES)[number];

const plainJson = 'expected JSON nested at most 16 deep';
const valueSchema = z
	.unknown()
	.refine((value) => value === undefined || isPlainJson(value), plainJson);
const itemSchema = z
	.unknown()
	.refine(isPlainJson, plainJson)
	.pipe(z.looseObject({ id: idSchema }));
const listSchema = z.enum(ITEM_LISTS);
const indexSchema = z.int().nonnegative();

/**
 * The smallest steps of an edit. Each carries what it found as well as what it leaves, so that it
 * can be undone, and so that a change of something that somebody else has changed meanwhile is
 * noticed. An absent `from` or `to` stands for an absent field.
 */
export const operationSchema = z.discriminatedUnion('op', [
	z.strictObject({
		op: z.literal('insert'),
		list: listSchema,
		/** Place in the list; the end where the list is shorter. */
		index: indexSchema,
		item: itemSchema
	}),
	z.strictObject({
		op: z.literal('remove'),
		list: listSchema,
		index: indexSchema,
		/** The item as it was. */
		item: itemSchema
	}),
	z.strictObject({
		op: z.literal('change'),
		list: listSchema,
		id: idSchema,
		field: z
			.string()
			.regex(/^[A-Za-z]{1,40}$/)
			.refine((field) => field !== 'id', 'an id does not change (expected another field)'),
		from: valueSchema.optional(),
		to: valueSchema.optional()
	}),
	z.strictObject({
		op: z.literal('set'),
		property: z.enum(PROPERTIES),
		from: valueSchema.optional(),
		to: valueSchema.optional()
	})
]);

export type Operation = z.infer<typeof operationSchema>;
export type Item = z.infer<typeof itemSchema>;

/** One action of a person: all its operations take effect, or none. */
export const editSchema = z.strictObject({
	/** Identity, so that an edit sent twice takes effect once. */
	id: z.uuid(),
	/** What was done, for the history: "Move 3 regulators". */
	label: z.string().min(1).max(200),
	operations: z.array(operationSchema).min(1).max(20_000)
});
export type Edit = z.infer<typeof editSchema>;

/** The lists and properties that the operations would change, for permission checks. */
export function partsTouched(operations: readonly Operation[]): Set<ItemList | Property> {
	return new Set(
		operations.map((operation) => (operation.op === 'set' ? operation.property : operation.list))
	);
}
