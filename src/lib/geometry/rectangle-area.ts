import type { Bounds, Outline, Point } from './point.ts';

/** One side of a rectangle as a half plane: keep points with sign * (coordinate - bound) <= 0. */
type Side = readonly [axis: 0 | 1, bound: number, sign: 1 | -1];

function clipToSide(outline: Outline, [axis, bound, sign]: Side): Point[] {
	const kept: Point[] = [];
	for (let i = 0, j = outline.length - 1; i < outline.length; j = i++) {
		const p = outline[j];
		const q = outline[i];
		const pOut = sign * (p[axis] - bound) > 0;
		const qOut = sign * (q[axis] - bound) > 0;
		if (pOut !== qOut) {
			const t = (bound - p[axis]) / (q[axis] - p[axis]);
			const crossing: [number, number] = [p[0] + t * (q[0] - p[0]), p[1] + t * (q[1] - p[1])];
			crossing[axis] = bound;
			kept.push(crossing);
		}
		if (!qOut) kept.push(q);
	}
	return kept;
}

/**
 * Area shared by a simple polygon and a rectangle: the polygon is cut by the four half planes
 * (Sutherland and Hodgman, CACM 17 (1974) 32). The bridges that a concave polygon may leave along
 * the rectangle's sides have no area, so the area is exact up to rounding.
 */
export function polygonRectangleArea(outline: Outline, bounds: Bounds): number {
	const sides: readonly Side[] = [
		[0, bounds.minX, -1],
		[0, bounds.maxX, 1],
		[1, bounds.minY, -1],
		[1, bounds.maxY, 1]
	];
	let clipped: Outline = outline;
	for (const side of sides) {
		clipped = clipToSide(clipped, side);
		if (clipped.length < 3) return 0;
	}
	let twice = 0;
	for (let i = 0; i < clipped.length; i++) {
		const [x1, y1] = clipped[i];
		const [x2, y2] = clipped[(i + 1) % clipped.length];
		twice += (x1 - bounds.minX) * (y2 - bounds.minY) - (x2 - bounds.minX) * (y1 - bounds.minY);
	}
	return Math.abs(twice) / 2;
}
