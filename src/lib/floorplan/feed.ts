import { z } from 'zod';
import {
	coordinateUmSchema,
	idSchema,
	nameSchema,
	nonNegativeSchema,
	positiveSchema
} from './primitives.ts';

/**
 * A bump or pad: an ideal source of the net's volts (input) or 0 V (ground) behind `seriesOhm`.
 * A series resistance of 0 holds the node at the source's volts.
 */
export const feedSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	net: idSchema,
	/** Where it lands; default: the top layer that its net uses. */
	layer: idSchema.optional(),
	xUm: coordinateUmSchema,
	yUm: coordinateUmSchema,
	seriesOhm: nonNegativeSchema,
	/** Electromigration limit of the bump, A. */
	maxA: positiveSchema.optional()
});

export type Feed = z.infer<typeof feedSchema>;
