import { z } from 'zod';
import {
	idSchema,
	lengthUmSchema,
	nameSchema,
	nonNegativeSchema,
	positiveSchema,
	quantitySchema
} from './primitives.ts';

/** A metal layer; the document lists them bottom to top. */
export const layerSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	/** The way its straps run. */
	direction: z.enum(['horizontal', 'vertical']),
	/** Sheet resistance at `refC`, ohm per square. */
	sheetOhm: positiveSchema,
	/** Temperature coefficient of resistance, per degree C. */
	tempCoPerC: quantitySchema.default(0),
	/** Temperature at which `sheetOhm` holds, degrees C. */
	refC: quantitySchema.default(25),
	thicknessUm: lengthUmSchema.optional(),
	/** Electromigration limit, mA per um of strap width. */
	maxMaPerUm: positiveSchema.optional(),
	/** Activation energy of Black's equation, eV; with the next two it moves limits to a corner's temperature. */
	emActivationEv: positiveSchema.optional(),
	/** Current exponent of Black's equation. */
	emExponent: positiveSchema.optional(),
	/** Temperature at which `maxMaPerUm` holds, degrees C. */
	emRefC: quantitySchema.optional()
});

/**
 * Vias between two layers of crossing direction. A crossing of straps of widths w1, w2 (um) has
 * max(1, floor(w1 * w2 * cutsPerUm2)) cuts in parallel.
 */
export const viaSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	lower: idSchema,
	upper: idSchema,
	ohmPerCut: positiveSchema,
	cutsPerUm2: nonNegativeSchema,
	/** Electromigration limit, mA per cut. */
	maxMaPerCut: positiveSchema.optional()
});

export type Layer = z.infer<typeof layerSchema>;
export type Via = z.infer<typeof viaSchema>;
