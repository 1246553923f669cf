import { z } from 'zod';
import {
	coordinateUmSchema,
	idSchema,
	lengthUmSchema,
	nameSchema,
	outlineSchema
} from './primitives.ts';

/**
 * A pattern of parallel straps of one net on one layer. Centre lines stand at
 * offsetUm + k * pitchUm across the layer's direction, clipped to the region (default: the die).
 */
export const strapSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	net: idSchema,
	layer: idSchema,
	pitchUm: lengthUmSchema,
	widthUm: lengthUmSchema,
	offsetUm: coordinateUmSchema,
	region: outlineSchema.optional()
});

export type Strap = z.infer<typeof strapSchema>;
