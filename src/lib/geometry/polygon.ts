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

/** Smallest rectangle around the outline. */
export function boundsOf(outline: Outline): Bounds {
	let minX = Infinity;
	let minY = Infinity;
	let maxX = -Infinity;
	let maxY = -Infinity;
	for (const [x, y] of outline) {
		minX = Math.min(minX, x);
		minY = Math.min(minY, y);
		maxX = Math.max(maxX, x);
		maxY = Math.max(maxY, y);
	}
	return { minX, minY, maxX, maxY };
}

/** Area inside the outline by the shoelace formula, positive where the corners turn left. */
export function signedArea(outline: Outline): number {
	let twice = 0;
	// Taken from the first corner, so that far-off coordinates do not cost digits.
	const [originX, originY] = outline[0] ?? [0, 0];
	for (let i = 0; i < outline.length; i++) {
		const [x1, y1] = outline[i];
		const [x2, y2] = outline[(i + 1) % outline.length];
		twice += (x1 - originX) * (y2 - originY) - (x2 - originX) * (y1 - originY);
	}
	return twice / 2;
}

/** Whether the point is inside; the boundary counts as inside. */
export function containsPoint(outline: Outline, x: number, y: number): boolean {
	let inside = false;
	for (let i = 0, j = outline.length - 1; i < outline.length; j = i++) {
		const [xi, yi] = outline[i];
		const [xj, yj] = outline[j];
		const cross = (xj - xi) * (y - yi) - (yj - yi) * (x - xi);
		const isBetween =
			Math.min(xi, xj) <= x &&
			x <= Math.max(xi, xj) &&
			Math.min(yi, yj) <= y &&
			y <= Math.max(yi, yj);
		if (cross === 0 && isBetween) return true;
		if (yi > y !== yj > y && x < ((xj - xi) * (y - yi)) / (yj - yi) + xi) inside = !inside;
	}
	return inside;
}

/** Corners of a rectangle, turning left from the lower left. */
export function rectangleOutline({ minX, minY, maxX, maxY }: Bounds): Point[] {
	return [
		[minX, minY],
		[maxX, minY],
		[maxX, maxY],
		[minX, maxY]
	];
}

/** Whether two rectangles share more than an edge. */
export function boundsOverlap(a: Bounds, b: Bounds): boolean {
	return a.minX < b.maxX && b.minX < a.maxX && a.minY < b.maxY && b.minY < a.maxY;
}
