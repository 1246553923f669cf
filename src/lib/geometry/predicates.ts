import type { Bounds, Point } from './point.ts';

/**
 * Rounding bound of a 2 x 2 determinant of differences, relative to the sum of its two products:
 * (3 + 16 eps) eps with eps = 2^-53 (Shewchuk, Discrete & Computational Geometry 18 (1997) 305).
 */
const TURN_ERROR = 3.3306690738754716e-16;

/**
 * Side of the line a-b on which c lies: 1 left, -1 right, 0 on it. Exact for integer coordinates
 * of any size that a double holds; otherwise as good as rounding allows.
 */
export function turn(a: Point, b: Point, c: Point): -1 | 0 | 1 {
	const left = (b[0] - a[0]) * (c[1] - a[1]);
	const right = (b[1] - a[1]) * (c[0] - a[0]);
	const difference = left - right;
	if (Math.abs(difference) > TURN_ERROR * (Math.abs(left) + Math.abs(right))) {
		return difference > 0 ? 1 : -1;
	}
	if (left === 0 && right === 0) return 0;
	if (![...a, ...b, ...c].every(Number.isSafeInteger)) return signOf(difference);
	const [ax, ay, bx, by, cx, cy] = [...a, ...b, ...c].map(BigInt);
	return signOf((bx - ax) * (cy - ay) - (by - ay) * (cx - ax));
}

function signOf(value: number | bigint): -1 | 0 | 1 {
	return value > 0 ? 1 : value < 0 ? -1 : 0;
}

/** Whether p lies in the rectangle that a and b span, its edges included. */
export function isBetween(a: Point, b: Point, p: Point): boolean {
	return (
		Math.min(a[0], b[0]) <= p[0] &&
		p[0] <= Math.max(a[0], b[0]) &&
		Math.min(a[1], b[1]) <= p[1] &&
		p[1] <= Math.max(a[1], b[1])
	);
}

/** Whether p lies on the closed segment a-b. */
export function isOnSegment(a: Point, b: Point, p: Point): boolean {
	return isBetween(a, b, p) && turn(a, b, p) === 0;
}

/** Whether the closed segments a-b and c-d share a point. */
export function segmentsTouch(a: Point, b: Point, c: Point, d: Point): boolean {
	if (turn(a, b, c) * turn(a, b, d) < 0 && turn(c, d, a) * turn(c, d, b) < 0) return true;
	return (
		isOnSegment(a, b, c) || isOnSegment(a, b, d) || isOnSegment(c, d, a) || isOnSegment(c, d, b)
	);
}

/** Whether two segments cross at a point inside both. */
export function segmentsCross(a: Point, b: Point, c: Point, d: Point): boolean {
	return turn(a, b, c) * turn(a, b, d) < 0 && turn(c, d, a) * turn(c, d, b) < 0;
}

/**
 * Whether a segment passes through the open inside of a rectangle: their projections on x, on y and
 * on the segment's normal overlap (separating axes of convex shapes).
 */
export function segmentEntersBounds(p: Point, q: Point, bounds: Bounds): boolean {
	const { minX, minY, maxX, maxY } = bounds;
	if (Math.min(p[0], q[0]) >= maxX || Math.max(p[0], q[0]) <= minX) return false;
	if (Math.min(p[1], q[1]) >= maxY || Math.max(p[1], q[1]) <= minY) return false;
	const sides = [
		turn(p, q, [minX, minY]),
		turn(p, q, [maxX, minY]),
		turn(p, q, [maxX, maxY]),
		turn(p, q, [minX, maxY])
	];
	return sides.includes(1) && sides.includes(-1);
}
