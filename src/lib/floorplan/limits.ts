import { z } from 'zod';
import { fractionSchema, idSchema, nonNegativeSchema, spanUmSchema } from './primitives.ts';

const limitFields = {
	/** Largest drop below nominal, V. */
	dropV: nonNegativeSchema.optional(),
	/** Largest rise above nominal, V. */
	riseV: nonNegativeSchema.optional(),
	/** Largest regulator current as a fraction of its rating. */
	regulatorLoad: fractionSchema.optional(),
	/** Whether a regulator below its least stable current is a finding. */
	belowMinA: z.enum(['allow', 'flag']).optional(),
	/** Least headroom of a regulator, V. */
	headroomV: nonNegativeSchema.optional(),
	/** Largest currents as fractions of the electromigration limits. */
	strapLoad: fractionSchema.optional(),
	viaLoad: fractionSchema.optional(),
	feedLoad: fractionSchema.optional(),
	/** Largest (highest - lowest) / mean of a net's regulator currents. */
	sharingSpread: nonNegativeSchema.optional(),
	/** Least distance between regulator footprints, um. */
	spacingUm: spanUmSchema.optional()
};

export const limitSetSchema = z.strictObject(limitFields);

/** Limits of the plan; an override on a block wins over one on its net, which wins over the plan's. */
export const limitsSchema = z.strictObject({
	...limitFields,
	overrides: z
		.strictObject({
			nets: z.record(idSchema, limitSetSchema).optional(),
			blocks: z.record(idSchema, limitSetSchema).optional()
		})
		.optional()
});

export type LimitSet = z.infer<typeof limitSetSchema>;
export type Limits = z.infer<typeof limitsSchema>;
