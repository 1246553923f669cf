import { z } from 'zod';
import {
	idSchema,
	nameSchema,
	positiveSchema,
	nonNegativeSchema,
	quantitySchema
} from './primitives.ts';

/** An operating mode: which blocks draw what (see `Block.amps`), and input volts that differ from nominal. */
export const modeSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	inputVolts: z.record(idSchema, quantitySchema).optional()
});

/** A corner of temperature, metal and cells. */
export const cornerSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	temperatureC: z.number().min(-273.15).max(1000),
	metalScale: positiveSchema.default(1),
	loadScale: nonNegativeSchema.default(1),
	outputOhmScale: positiveSchema.default(1)
});

export type Mode = z.infer<typeof modeSchema>;
export type Corner = z.infer<typeof cornerSchema>;
