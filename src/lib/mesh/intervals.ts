import type { Interval } from '#lib/geometry/index.ts';

/** What lies in both lists; lists are sorted and disjoint. */
export function intersectIntervals(a: readonly Interval[], b: readonly Interval[]): Interval[] {
	const both: Interval[] = [];
	let i = 0;
	let j = 0;
	while (i < a.length && j < b.length) {
		const start = Math.max(a[i][0], b[j][0]);
		const end = Math.min(a[i][1], b[j][1]);
		if (start < end) both.push([start, end]);
		if (a[i][1] < b[j][1]) i++;
		else j++;
	}
	return both;
}

/** What of the list remains outside the cuts; cuts without length cut nothing. */
export function subtractIntervals(
	list: readonly Interval[],
	cuts: readonly Interval[]
): Interval[] {
	let rest = [...list];
	for (const [from, to] of cuts) {
		if (from >= to) continue;
		rest = rest.flatMap(([start, end]): Interval[] => {
			if (to <= start || from >= end) return [[start, end]];
			const pieces: Interval[] = [];
			if (start < from) pieces.push([start, from]);
			if (to < end) pieces.push([to, end]);
			return pieces;
		});
	}
	return rest;
}
