import { z } from 'zod';

/** Largest coordinate or length, um. Integer nanometres of this size stay well inside 32 bits. */
export const MAX_LENGTH_UM = 1_000_000;

/** Nanometres per micrometre: file lengths are multiples of 1 nm. */
export const NM_PER_UM = 1000;

/** Whole nanometres of a length in um. */
export function toNm(um: number): number {
	return Math.round(um * NM_PER_UM);
}

/** The double nearest to a whole number of nanometres, in um: what parsing a file gives. */
export function onGridUm(um: number): number {
	return toNm(um) / NM_PER_UM;
}

/** Identity of an item, unique within its list: 1 to 64 letters, digits and `_ - . [ ] /`. */
export const idSchema = z
	.string()
	.regex(/^[A-Za-z0-9_\-.[\]/]{1,64}$/, 'expected 1 to 64 letters, digits or _ - . [ ] /')
	// Ids are keys of objects (a block's amps by mode), where these names mean something else.
	.refine((id) => !(id in Object.prototype), 'expected another id: this name is reserved');

/** Name shown to people; the id is shown where there is none. */
export const nameSchema = z.string().min(1).max(200);

/** True where a length lies on the 1 nm grid (up to the rounding of decimal fractions). */
function isOnGrid(um: number): boolean {
	return Math.abs(um * NM_PER_UM - Math.round(um * NM_PER_UM)) < 1e-4;
}

/** A coordinate or signed distance, um, snapped to the exact double nearest its nanometre. */
export const coordinateUmSchema = z
	.number()
	.min(-MAX_LENGTH_UM)
	.max(MAX_LENGTH_UM)
	.refine(isOnGrid, 'expected a multiple of 0.001 um')
	.overwrite(onGridUm);

/** A length greater than zero, um. */
export const lengthUmSchema = coordinateUmSchema.refine(
	(um) => um > 0,
	'expected a length greater than 0 um'
);

/** A length of zero or more, um. */
export const spanUmSchema = coordinateUmSchema.refine(
	(um) => um >= 0,
	'expected a length of 0 um or more'
);

/** A point `[x, y]`, um, x to the right and y up. */
export const pointUmSchema = z.tuple([coordinateUmSchema, coordinateUmSchema]);

/** A closed polygon without its first corner repeated, um; that it is simple is checked on the document. */
export const outlineSchema = z.array(pointUmSchema).min(3).max(10_000);

/**
 * Magnitudes beyond these are slips, and products of a few of them would leave the range of a
 * double. Wide enough for any quantity in SI units, and for 1e30 as "never".
 */
const LARGEST = 1e30;
const SMALLEST = 1e-30;

/** Any signed quantity. */
export const quantitySchema = z.number().min(-LARGEST).max(LARGEST);
export const positiveSchema = z
	.number()
	.positive()
	.max(LARGEST)
	.refine((value) => value <= 0 || value >= SMALLEST, `expected at least ${SMALLEST}`);
export const nonNegativeSchema = z.number().nonnegative().max(LARGEST);
/** A share of a limit: 0.8 is 80 %. */
export const fractionSchema = nonNegativeSchema;

export type PointUm = z.infer<typeof pointUmSchema>;
export type OutlineUm = z.infer<typeof outlineSchema>;
