import { z } from 'zod';
import {
	idSchema,
	nameSchema,
	nonNegativeSchema,
	outlineSchema,
	quantitySchema
} from './primitives.ts';

/** A current map over the bounding box of the block, row by row from the lower left. */
export const currentMapSchema = z
	.strictObject({
		kind: z.literal('map'),
		columns: z.int().positive().max(4096),
		rows: z.int().positive().max(4096),
		weights: z.array(nonNegativeSchema)
	})
	.refine((map) => map.weights.length === map.columns * map.rows, {
		message: 'expected columns * rows weights',
		path: ['weights']
	})
	.refine((map) => map.weights.some((weight) => weight > 0), {
		message: 'expected at least one weight greater than 0',
		path: ['weights']
	});

/** A load on a regulated or an input net. */
export const blockSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	net: idSchema,
	outline: outlineSchema,
	/** Current at nominal volts by mode id, A; a mode without an entry draws nothing. */
	amps: z.record(idSchema, quantitySchema),
	spread: z.union([z.literal('uniform'), currentMapSchema]).default('uniform'),
	/** I = amps * (v / volts) ^ voltageExponent: 0 constant current, 1 a resistor, -1 constant power. */
	voltageExponent: z.number().min(-4).max(4).default(0)
});

export type Block = z.infer<typeof blockSchema>;
export type CurrentMap = z.infer<typeof currentMapSchema>;
