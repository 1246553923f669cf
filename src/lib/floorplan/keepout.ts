import { z } from 'zod';
import { idSchema, nameSchema, outlineSchema } from './primitives.ts';

export const keepoutSchema = z.strictObject({
	id: idSchema,
	name: nameSchema.optional(),
	outline: outlineSchema,
	forbids: z.array(z.enum(['regulators', 'straps'])).min(1),
	/** Layers on which straps are cut; default: all. */
	layers: z.array(idSchema).optional()
});

export type Keepout = z.infer<typeof keepoutSchema>;
