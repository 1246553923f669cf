import type { Outline, Point } from './point.ts';
import { segmentsTouch, turn } from './predicates.ts';

/** An edge of the outline, its ends in the order in which the sweep meets them. */
interface Edge {
	readonly start: Point;
	readonly end: Point;
}

/** Order of the sweep: by x, then by y, as if the sweep line leaned a little to the left. */
function comesBefore(p: Point, q: Point): boolean {
	return p[0] < q[0] || (p[0] === q[0] && p[1] < q[1]);
}

/** First place in the status whose edge does not lie below p, or with `orThrough`, not below or through it. */
function place(status: readonly Edge[], p: Point, orThrough: boolean): number {
	let low = 0;
	let high = status.length;
	while (low < high) {
		const middle = (low + high) >> 1;
		const side = turn(status[middle].start, status[middle].end, p);
		if (side > 0 || (orThrough && side === 0)) low = middle + 1;
		else high = middle;
	}
	return low;
}

function haveCommonEnd(a: Edge, b: Edge): boolean {
	return a.start === b.start || a.start === b.end || a.end === b.start || a.end === b.end;
}

function areInConflict(a: Edge | undefined, b: Edge | undefined): boolean {
	if (!a || !b || haveCommonEnd(a, b)) return false;
	return segmentsTouch(a.start, a.end, b.start, b.end);
}

/**
 * Whether the outline neither crosses nor touches itself and has no edge of length zero. A plane
 * sweep (Shamos and Hoey, Proc. 17th FOCS (1976) 208): edges in the order in which they lie over
 * each other at the sweep line, each pair of neighbours tested when it comes to be; at each corner
 * the only edges through it may be those that end there. Exact for integer coordinates.
 */
export function isSimplePolygon(outline: Outline): boolean {
	const n = outline.length;
	if (n < 3) return false;
	const edges = outline.map((p, i): Edge => {
		const q = outline[(i + 1) % n];
		return comesBefore(p, q) ? { start: p, end: q } : { start: q, end: p };
	});
	const order = Array.from({ length: n }, (_, i) => i).sort(
		(i, j) => outline[i][0] - outline[j][0] || outline[i][1] - outline[j][1]
	);
	/** Edges that the sweep line cuts, from the lowest up. */
	const status: Edge[] = [];
	let last: Point | null = null;
	for (const i of order) {
		const corner = outline[i];
		if (last && last[0] === corner[0] && last[1] === corner[1]) return false;
		last = corner;
		const around = [edges[(i + n - 1) % n], edges[i]];
		const ending = around.filter((edge) => edge.end === corner);
		const starting = around.filter((edge) => edge.start === corner);
		if (starting.length === 2) {
			const side = turn(corner, starting[0].end, starting[1].end);
			if (side === 0) return false;
			if (side < 0) starting.reverse();
		}
		const from = place(status, corner, false);
		const to = place(status, corner, true);
		const through = status.slice(from, to);
		if (through.length !== ending.length || !through.every((edge) => ending.includes(edge))) {
			return false;
		}
		status.splice(from, through.length, ...starting);
		const above = from + starting.length;
		if (areInConflict(status[from - 1], status[from])) return false;
		if (starting.length > 0 && areInConflict(status[above - 1], status[above])) return false;
	}
	return true;
}
