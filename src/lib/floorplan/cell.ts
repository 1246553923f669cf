import { z } from 'zod';
import {
	idSchema,
	lengthUmSchema,
	nameSchema,
	nonNegativeSchema,
	pointUmSchema,
	positiveSchema
} from './primitives.ts';

/** Small-signal data for the loop check at the solved current. */
export const cellLoopSchema = z.strictObject({
	/** Loop gain at `refA`. */
	gainAtRef: positiveSchema,
	refA: positiveSchema,
	/** Gain follows (I / refA) ^ gainExponent. */
	gainExponent: z.number().min(-10).max(10).default(-0.5),
	internalPolesHz: z.array(positiveSchema).default([]),
	zerosHz: z.array(positiveSchema).default([]),
	outputFarad: positiveSchema,
	minPhaseDeg: nonNegativeSchema
});

/** Which library item a copied cell or stack came from. */
export const libraryReferenceSchema = z.strictObject({
	id: idSchema,
	version: z.int().positive()
});

/** A regulator cell. Pin positions are from the lower left corner of the unrotated footprint. */
export const cellSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	widthUm: lengthUmSchema,
	heightUm: lengthUmSchema,
	/** Slope of the output: (set point - output) / outputOhm is the wanted current. */
	outputOhm: positiveSchema,
	/** Resistance of the pass device fully on. */
	onOhm: positiveSchema,
	/** Rated (and limiting) current, A. */
	maxA: positiveSchema,
	/** Least current at which the cell is stable, A. */
	minA: nonNegativeSchema,
	/** Largest current it can sink, A. */
	sinkA: nonNegativeSchema.default(0),
	quiescentA: nonNegativeSchema,
	/** Standard deviation of the set point over chips, V. */
	offsetSigmaV: nonNegativeSchema,
	/** Default of each: the centre of the footprint. */
	pins: z
		.strictObject({
			input: pointUmSchema.optional(),
			output: pointUmSchema.optional(),
			ground: pointUmSchema.optional()
		})
		.optional(),
	loop: cellLoopSchema.optional(),
	library: libraryReferenceSchema.optional()
});

export type Cell = z.infer<typeof cellSchema>;
export type CellLoop = z.infer<typeof cellLoopSchema>;
export type LibraryReference = z.infer<typeof libraryReferenceSchema>;
