import type { Bounds, Outline, Point } from './point.ts';
import { boundsOf, boundsOverlap, containsPoint } from './polygon.ts';
import { isOnSegment, segmentEntersBounds, segmentsCross } from './predicates.ts';

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

function isStrictlyInside(outline: Outline, p: Point): boolean {
	if (!containsPoint(outline, p[0], p[1])) return false;
	return outline.every((corner, i) => !isOnSegment(corner, outline[(i + 1) % outline.length], p));
}

/** Middles of the pieces into which the corners of the other outline cut the edges. */
function middles(outline: Outline, other: Outline): Point[] {
	return outline.flatMap((p, i) => {
		const q = outline[(i + 1) % outline.length];
		const cuts = [p, ...other.filter((corner) => isOnSegment(p, q, corner)), q];
		const far = (a: Point) => Math.abs(a[0] - p[0]) + Math.abs(a[1] - p[1]);
		cuts.sort((a, b) => far(a) - far(b));
		return cuts
			.slice(1)
			.map((cut, k): Point => [(cuts[k][0] + cut[0]) / 2, (cuts[k][1] + cut[1]) / 2]);
	});
}

/** Twice the size, so that the middle of two integer points is an integer point. */
function doubled(outline: Outline): Outline {
	return outline.map(([x, y]) => [2 * x, 2 * y]);
}

/**
 * Whether two simple polygons share area; touching along edges or at corners does not count. Where
 * no edges cross, every piece of an edge between corners that lie on it is wholly inside, outside
 * or on the boundary of the other polygon, so its middle tells which. Exact for integer coordinates.
 */
export function polygonsOverlap(first: Outline, second: Outline): boolean {
	if (!boundsOverlap(boundsOf(first), boundsOf(second))) return false;
	const a = doubled(first);
	const b = doubled(second);
	for (let i = 0; i < a.length; i++) {
		for (let j = 0; j < b.length; j++) {
			if (segmentsCross(a[i], a[(i + 1) % a.length], b[j], b[(j + 1) % b.length])) return true;
		}
	}
	return (
		middles(a, b).some((point) => isStrictlyInside(b, point)) ||
		middles(b, a).some((point) => isStrictlyInside(a, point)) ||
		// All boundaries on each other: the same polygon, or two that only touch.
		isStrictlyInside(b, innerPoint(a))
	);
}

function entersBounds(outline: Outline, bounds: Bounds): boolean {
	return outline.some((p, i) => segmentEntersBounds(p, outline[(i + 1) % outline.length], bounds));
}

/** Whether a polygon holds the middle of a rectangle; where no edge enters it, then all of it. */
function containsMiddle(outline: Outline, { minX, minY, maxX, maxY }: Bounds): boolean {
	return containsPoint(outline, (minX + maxX) / 2, (minY + maxY) / 2);
}

/** Whether the rectangle lies wholly in the simple polygon; edges may touch. Exact for integers. */
export function polygonContainsBounds(outline: Outline, bounds: Bounds): boolean {
	return !entersBounds(outline, bounds) && containsMiddle(outline, bounds);
}

/** Whether the simple polygon and the rectangle share area; touching does not count. Exact for integers. */
export function polygonOverlapsBounds(outline: Outline, bounds: Bounds): boolean {
	if (!boundsOverlap(boundsOf(outline), bounds)) return false;
	return entersBounds(outline, bounds) || containsMiddle(outline, bounds);
}
