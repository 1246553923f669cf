/** A point `[x, y]`; x to the right, y up. Any unit, as long as one call uses one. */
export type Point = readonly [number, number];

/** Corners of a closed polygon in order, the first not repeated at the end. */
export type Outline = readonly Point[];

/** An axis-aligned rectangle. */
export interface Bounds {
	readonly minX: number;
	readonly minY: number;
	readonly maxX: number;
	readonly maxY: number;
}
