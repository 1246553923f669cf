import type { Outline, Point } from './polygon.ts';

function turn(a: Point, b: Point, c: Point): number {
	return Math.sign((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]));
}

function isOnSegment(a: Point, b: Point, p: Point): boolean {
	return (
		Math.min(a[0], b[0]) <= p[0] &&
		p[0] <= Math.max(a[0], b[0]) &&
		Math.min(a[1], b[1]) <= p[1] &&
		p[1] <= Math.max(a[1], b[1])
	);
}

/** Whether the closed segments a-b and c-d share a point. */
export function segmentsTouch(a: Point, b: Point, c: Point, d: Point): boolean {
	const abc = turn(a, b, c);
	const abd = turn(a, b, d);
	const cda = turn(c, d, a);
	const cdb = turn(c, d, b);
	if (abc !== abd && cda !== cdb) return true;
	return (
		(abc === 0 && isOnSegment(a, b, c)) ||
		(abd === 0 && isOnSegment(a, b, d)) ||
		(cda === 0 && isOnSegment(c, d, a)) ||
		(cdb === 0 && isOnSegment(c, d, b))
	);
}

/** An edge folds back where it reverses over the edge before it. */
function foldsBack(before: Point, corner: Point, after: Point): boolean {
	const dot =
		(corner[0] - before[0]) * (after[0] - corner[0]) +
		(corner[1] - before[1]) * (after[1] - corner[1]);
	return turn(before, corner, after) === 0 && dot < 0;
}

/**
 * Whether the outline neither crosses nor touches itself and has no edge of length zero. Edges are
 * swept by their left ends, so that only edges whose x ranges overlap are compared.
 */
export function isSimplePolygon(outline: Outline): boolean {
	const n = outline.length;
	if (n < 3) return false;
	const corner = (i: number) => outline[i % n];
	for (let i = 0; i < n; i++) {
		const [x1, y1] = corner(i);
		const [x2, y2] = corner(i + 1);
		if (x1 === x2 && y1 === y2) return false;
		if (foldsBack(corner(i), corner(i + 1), corner(i + 2))) return false;
	}
	const edges = Array.from({ length: n }, (_, i) => ({
		i,
		left: Math.min(corner(i)[0], corner(i + 1)[0]),
		right: Math.max(corner(i)[0], corner(i + 1)[0])
	})).sort((a, b) => a.left - b.left);
	let open: typeof edges = [];
	for (const edge of edges) {
		open = open.filter((other) => other.right >= edge.left);
		for (const other of open) {
			const apart = Math.abs(edge.i - other.i);
			if (apart === 1 || apart === n - 1) continue;
			if (segmentsTouch(corner(edge.i), corner(edge.i + 1), corner(other.i), corner(other.i + 1))) {
				return false;
			}
		}
		open.push(edge);
	}
	return true;
}
