import {
	boundsOf,
	boundsOverlap,
	containsPoint,
	type Bounds,
	type Outline,
	type Point
} from './polygon.ts';

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

/** Whether two segments cross at a point inside both. */
function segmentsCross(a: Point, b: Point, c: Point, d: Point): boolean {
	const side = (p: Point, q: Point, r: Point) =>
		(q[0] - p[0]) * (r[1] - p[1]) - (q[1] - p[1]) * (r[0] - p[0]);
	return side(a, b, c) * side(a, b, d) < 0 && side(c, d, a) * side(c, d, b) < 0;
}

/** A point strictly inside a simple polygon: half way over the widest part of a middle section. */
function innerPoint(outline: Outline): Point {
	const ys = [...new Set(outline.map(([, y]) => y))].sort((a, b) => a - b);
	let best: Point = outline[0];
	let bestWidth = -1;
	for (let k = 0; k + 1 < ys.length; k++) {
		const y = (ys[k] + ys[k + 1]) / 2;
		const xs: number[] = [];
		for (let i = 0, j = outline.length - 1; i < outline.length; j = i++) {
			const [xj, yj] = outline[j];
			const [xi, yi] = outline[i];
			if (yi > y !== yj > y) xs.push(xj + ((y - yj) / (yi - yj)) * (xi - xj));
		}
		xs.sort((a, b) => a - b);
		for (let i = 0; i + 1 < xs.length; i += 2) {
			if (xs[i + 1] - xs[i] > bestWidth) {
				bestWidth = xs[i + 1] - xs[i];
				best = [(xs[i] + xs[i + 1]) / 2, y];
			}
		}
	}
	return best;
}

function isStrictlyInside(outline: Outline, [x, y]: Point): boolean {
	if (!containsPoint(outline, x, y)) return false;
	return outline.every((p, i) => {
		const q = outline[(i + 1) % outline.length];
		const cross = (q[0] - p[0]) * (y - p[1]) - (q[1] - p[1]) * (x - p[0]);
		const isBetween =
			Math.min(p[0], q[0]) <= x &&
			x <= Math.max(p[0], q[0]) &&
			Math.min(p[1], q[1]) <= y &&
			y <= Math.max(p[1], q[1]);
		return cross !== 0 || !isBetween;
	});
}

/** Points along each edge between its meetings with the other outline, where inside can be told. */
function probes(outline: Outline, other: Outline): Point[] {
	const points: Point[] = [];
	for (let i = 0; i < outline.length; i++) {
		const p = outline[i];
		const q = outline[(i + 1) % outline.length];
		const cuts = [0, 1];
		for (const corner of other) {
			const dx = q[0] - p[0];
			const dy = q[1] - p[1];
			if (dx * (corner[1] - p[1]) - dy * (corner[0] - p[0]) !== 0) continue;
			const t = ((corner[0] - p[0]) * dx + (corner[1] - p[1]) * dy) / (dx * dx + dy * dy);
			if (t > 0 && t < 1) cuts.push(t);
		}
		cuts.sort((a, b) => a - b);
		for (let k = 0; k + 1 < cuts.length; k++) {
			const t = (cuts[k] + cuts[k + 1]) / 2;
			points.push([p[0] + t * (q[0] - p[0]), p[1] + t * (q[1] - p[1])]);
		}
		points.push(p);
	}
	return points;
}

/** Whether two simple polygons share area; touching along edges or at corners does not count. */
export function polygonsOverlap(a: Outline, b: Outline): boolean {
	if (!boundsOverlap(boundsOf(a), boundsOf(b))) return false;
	for (let i = 0; i < a.length; i++) {
		for (let j = 0; j < b.length; j++) {
			if (segmentsCross(a[i], a[(i + 1) % a.length], b[j], b[(j + 1) % b.length])) return true;
		}
	}
	return (
		probes(a, b).some((point) => isStrictlyInside(b, point)) ||
		probes(b, a).some((point) => isStrictlyInside(a, point)) ||
		isStrictlyInside(b, innerPoint(a)) ||
		isStrictlyInside(a, innerPoint(b))
	);
}

/** Whether the rectangle lies wholly in the simple polygon; edges may touch. */
export function polygonContainsBounds(outline: Outline, bounds: Bounds): boolean {
	const { minX, minY, maxX, maxY } = bounds;
	const area = (maxX - minX) * (maxY - minY);
	return polygonRectangleArea(outline, bounds) >= area * (1 - 1e-12);
}
