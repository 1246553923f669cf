import { z } from 'zod';
import {
	coordinateUmSchema,
	idSchema,
	nameSchema,
	nonNegativeSchema,
	positiveSchema,
	quantitySchema
} from './primitives.ts';

/**
 * The shared slow loop of a regulated net: one common correction u is added to every set point so
 * that the weighted mean voltage at the points equals the net's volts, with |u| <= rangeV.
 */
export const senseLoopSchema = z.strictObject({
	points: z
		.array(
			z.strictObject({
				xUm: coordinateUmSchema,
				yUm: coordinateUmSchema,
				weight: positiveSchema.default(1)
			})
		)
		.min(1),
	/** Largest correction either way, V. */
	rangeV: nonNegativeSchema
});

export const netSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	/** `input` feeds regulators, `regulated` is fed by them, `ground` returns the current. */
	kind: z.enum(['input', 'regulated', 'ground']),
	/** Nominal volts. */
	volts: quantitySchema,
	senseLoop: senseLoopSchema.optional(),
	/** Whether the net's regulators refer to the ground beside them or to a quiet 0 V. */
	groundReference: z.enum(['local', 'quiet']).default('local')
});

export type Net = z.infer<typeof netSchema>;
export type NetKind = Net['kind'];
export type SenseLoop = z.infer<typeof senseLoopSchema>;
