import { boundsOf, clipLineToPolygon, type Bounds, type Interval } from '#lib/geometry/index.ts';
import type { Floorplan, Strap } from '#lib/floorplan/index.ts';

/** The centre lines of one strap pattern, clipped to region and die, ready to be drawn. */
export interface StrapLines {
	readonly strap: Strap;
	readonly netKind: 'input' | 'regulated' | 'ground';
	readonly isHorizontal: boolean;
	/** Start, end and position across of each piece, um, three numbers each, by position. */
	readonly pieces: Float64Array;
}

/** The parts that two sorted lists of intervals share. */
function intersect(a: readonly Interval[], b: readonly Interval[]): Interval[] {
	const shared: Interval[] = [];
	for (let i = 0, j = 0; i < a.length && j < b.length;) {
		const start = Math.max(a[i][0], b[j][0]);
		const end = Math.min(a[i][1], b[j][1]);
		if (end > start) shared.push([start, end]);
		if (a[i][1] < b[j][1]) i++;
		else j++;
	}
	return shared;
}

function linesOf(floorplan: Floorplan, strap: Strap): StrapLines | null {
	const layer = floorplan.layers.find(({ id }) => id === strap.layer);
	const net = floorplan.nets.find(({ id }) => id === strap.net);
	if (!layer || !net) return null;
	const { direction } = layer;
	const isHorizontal = direction === 'horizontal';
	const bounds: Bounds = boundsOf(strap.region ?? floorplan.die.outline);
	const [low, high] = isHorizontal ? [bounds.minY, bounds.maxY] : [bounds.minX, bounds.maxX];
	const pieces: number[] = [];
	const first = Math.ceil((low - strap.offsetUm) / strap.pitchUm);
	const last = Math.floor((high - strap.offsetUm) / strap.pitchUm);
	for (let k = first; k <= last; k++) {
		const across = strap.offsetUm + k * strap.pitchUm;
		let parts = clipLineToPolygon(floorplan.die.outline, direction, across);
		if (strap.region) parts = intersect(parts, clipLineToPolygon(strap.region, direction, across));
		for (const [start, end] of parts) pieces.push(start, end, across);
	}
	return { strap, netKind: net.kind, isHorizontal, pieces: Float64Array.from(pieces) };
}

/** The lines of every pattern, ground first so that rails lie on top. */
export function strapLines(floorplan: Floorplan): StrapLines[] {
	const ORDER = ['ground', 'input', 'regulated'];
	return floorplan.straps
		.flatMap((strap) => linesOf(floorplan, strap) ?? [])
		.sort((a, b) => ORDER.indexOf(a.netKind) - ORDER.indexOf(b.netKind));
}
