import { z } from 'zod';
import { coordinateUmSchema, idSchema, nameSchema, quantitySchema } from './primitives.ts';

export const ORIENTATIONS = ['R0', 'R90', 'R180', 'R270', 'MX', 'MY', 'MXR90', 'MYR90'] as const;

/** A placed regulator; x, y is the lower left corner of its oriented footprint. */
export const regulatorSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	cell: idSchema,
	/** The input net; `null` is an ideal input that never drops out. */
	input: idSchema.nullable(),
	output: idSchema,
	xUm: coordinateUmSchema,
	yUm: coordinateUmSchema,
	orient: z.enum(ORIENTATIONS).default('R0'),
	enabled: z.boolean().default(true),
	/** A fixed regulator is not moved by people or by searches. */
	fixed: z.boolean().default(false),
	/** Offset of this unit's set point, V. */
	offsetV: quantitySchema.default(0)
});

export type Regulator = z.infer<typeof regulatorSchema>;
export type Orientation = (typeof ORIENTATIONS)[number];
