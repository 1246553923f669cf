import type { Outline } from './point.ts';

/** A piece of a line, from `start` to `end`, along the line's own axis. */
export type Interval = [start: number, end: number];

/** Joins intervals that touch or overlap. */
function merge(intervals: Interval[]): Interval[] {
	const merged: Interval[] = [];
	for (const [start, end] of intervals.sort((a, b) => a[0] - b[0] || a[1] - b[1])) {
		const last = merged.at(-1);
		if (last && start <= last[1]) last[1] = Math.max(last[1], end);
		else merged.push([start, end]);
	}
	return merged;
}

/** Where the line is inside just beside it: at `across` moved by an infinitesimal up or down. */
function sideIntervals(
	outline: Outline,
	along: 0 | 1,
	across: number,
	isUpper: boolean
): Interval[] {
	const other = along === 0 ? 1 : 0;
	const crossings: number[] = [];
	for (let i = 0, j = outline.length - 1; i < outline.length; j = i++) {
		const p = outline[j];
		const q = outline[i];
		const isAbove = (value: number) => (isUpper ? value > across : value >= across);
		if (isAbove(p[other]) === isAbove(q[other])) continue;
		const t = (across - p[other]) / (q[other] - p[other]);
		crossings.push(t === 0 ? p[along] : t === 1 ? q[along] : p[along] + t * (q[along] - p[along]));
	}
	crossings.sort((a, b) => a - b);
	const intervals: Interval[] = [];
	for (let k = 0; k + 1 < crossings.length; k += 2)
		intervals.push([crossings[k], crossings[k + 1]]);
	return intervals;
}

/**
 * The parts of a horizontal line y = coordinate, or of a vertical line x = coordinate, that lie in
 * the outline: sorted, disjoint, of positive length. A line along a boundary edge is inside.
 */
export function clipLineToPolygon(
	outline: Outline,
	direction: 'horizontal' | 'vertical',
	coordinate: number
): Interval[] {
	const along = direction === 'horizontal' ? 0 : 1;
	// The closed polygon's section is the union of the sections just above and just below the line.
	return merge([
		...sideIntervals(outline, along, coordinate, true),
		...sideIntervals(outline, along, coordinate, false)
	]).filter(([start, end]) => end > start);
}
