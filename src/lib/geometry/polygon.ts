import type { Bounds, Outline, Point } from './point.ts';
import { isBetween, turn } from './predicates.ts';

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

/** Whether the point is inside; the boundary counts as inside. Exact for integer coordinates. */
export function containsPoint(outline: Outline, x: number, y: number): boolean {
	let isInside = false;
	const point: Point = [x, y];
	for (let i = 0, j = outline.length - 1; i < outline.length; j = i++) {
		const p = outline[j];
		const q = outline[i];
		const isCrossing = p[1] > y !== q[1] > y;
		if (!isCrossing && !isBetween(p, q, point)) continue;
		const side = turn(p, q, point);
		if (side === 0 && isBetween(p, q, point)) return true;
		// A ray to the right meets the edge where the point is to the left of it, as seen going up.
		if (isCrossing && side === (q[1] > p[1] ? 1 : -1)) isInside = !isInside;
	}
	return isInside;
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
