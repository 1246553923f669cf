import { boundsOf, clipLineToPolygon } from '#lib/geometry/index.ts';
import type { Bounds, Interval, Outline } from '#lib/geometry/index.ts';
import { MAX_RUNS } from './constants.ts';
import { intersectIntervals, subtractIntervals } from './intervals.ts';
import type { ModelProblem, ModelWarning } from './network.ts';
import { outlineToNm, type PlanIndex, type StrapPattern } from './plan-index.ts';

/**
 * Runs: the single straight conductors that the strap patterns draw, after clipping and cutting.
 * Along means the layer's direction, across the other one.
 *
 * Invariants: start < end; runs are ordered by net, layer, coordinate, start, pattern, so that the
 * runs of one net on one layer (a group) are contiguous and sorted by coordinate.
 */
export interface Runs {
	readonly count: number;
	/** Index into `floorplan.straps`. Length `count`, like the next five. */
	readonly strap: Int32Array;
	readonly net: Uint16Array;
	readonly layer: Uint8Array;
	/** Position of the centre line across the layer's direction, nm. */
	readonly coordinateNm: Int32Array;
	/** Ends along the layer's direction, nm. */
	readonly startNm: Int32Array;
	readonly endNm: Int32Array;
	/**
	 * First run of group net * layerCount + layer; the group ends where the next begins.
	 * Length netCount * layerCount + 1.
	 */
	readonly groupStart: Int32Array;
}

export type RunsResult =
	| { readonly status: 'drawn'; readonly runs: Runs; readonly warnings: readonly ModelWarning[] }
	| { readonly status: 'refused'; readonly problems: readonly ModelProblem[] };

/** First and last multiple k of the pattern's pitch whose centre line lies within [low, high] nm. */
function lineRange(
	pattern: StrapPattern,
	low: number,
	high: number
): [first: number, last: number] {
	return [
		Math.ceil((low - pattern.offsetNm) / pattern.pitchNm),
		Math.floor((high - pattern.offsetNm) / pattern.pitchNm)
	];
}

interface Cut {
	readonly outline: Outline;
	readonly bounds: Bounds;
	/** Indices of the layers it cuts. */
	readonly layers: ReadonlySet<number>;
}

function strapCuts({ floorplan, layerOf }: PlanIndex): Cut[] {
	return floorplan.keepouts
		.filter((keepout) => keepout.forbids.includes('straps'))
		.map((keepout) => {
			const outline = outlineToNm(keepout.outline);
			const ids = keepout.layers ?? floorplan.layers.map((layer) => layer.id);
			return {
				outline,
				bounds: boundsOf(outline),
				layers: new Set(ids.map((id) => layerOf.get(id) ?? -1))
			};
		});
}

/** What of one centre line remains: inside die and region, outside the cuts, on whole nanometres. */
function spansOfLine(
	direction: 'horizontal' | 'vertical',
	coordinate: number,
	die: Outline,
	region: Outline | null,
	cuts: readonly Cut[]
): Interval[] {
	let spans: Interval[] = clipLineToPolygon(die, direction, coordinate);
	if (region !== null) {
		spans = intersectIntervals(spans, clipLineToPolygon(region, direction, coordinate));
	}
	for (const { outline, bounds } of cuts) {
		const [low, high] =
			direction === 'horizontal' ? [bounds.minY, bounds.maxY] : [bounds.minX, bounds.maxX];
		if (coordinate < low || coordinate > high) continue;
		spans = subtractIntervals(spans, clipLineToPolygon(outline, direction, coordinate));
	}
	return spans
		.map(([start, end]): Interval => [Math.round(start), Math.round(end)])
		.filter(([start, end]) => start < end);
}

function tooManyRuns(pattern: StrapPattern, lines: number): ModelProblem {
	return {
		path: `straps (${pattern.id})`,
		message:
			`draws ${lines} straps, which with the other patterns is more than ${MAX_RUNS} ` +
			`(expected a larger pitch or a smaller region)`,
		subject: pattern.id
	};
}

/**
 * Draws every strap pattern: centre lines at offset + k * pitch, clipped to region and die, cut by
 * strap keep-outs. A line on the edge of die or region is inside; a line along the edge of a
 * keep-out is cut, one that only touches a corner is not.
 */
export function drawRuns(plan: PlanIndex): RunsResult {
	const die = outlineToNm(plan.floorplan.die.outline);
	const dieBounds = boundsOf(die);
	const allCuts = strapCuts(plan);
	const strap: number[] = [];
	const coordinate: number[] = [];
	const start: number[] = [];
	const end: number[] = [];
	const warnings: ModelWarning[] = [];
	let lines = 0;

	for (const [s, pattern] of plan.patterns.entries()) {
		const region = plan.floorplan.straps[s].region;
		const regionNm = region === undefined ? null : outlineToNm(region);
		const bounds = regionNm === null ? dieBounds : boundsOf(regionNm);
		const isHorizontal = plan.isHorizontal[pattern.layer];
		const direction = isHorizontal ? 'horizontal' : 'vertical';
		const cuts = allCuts.filter((cut) => cut.layers.has(pattern.layer));
		const [first, last] = isHorizontal
			? lineRange(
					pattern,
					Math.max(bounds.minY, dieBounds.minY),
					Math.min(bounds.maxY, dieBounds.maxY)
				)
			: lineRange(
					pattern,
					Math.max(bounds.minX, dieBounds.minX),
					Math.min(bounds.maxX, dieBounds.maxX)
				);
		lines += Math.max(0, last - first + 1);
		if (lines > MAX_RUNS) {
			return { status: 'refused', problems: [tooManyRuns(pattern, last - first + 1)] };
		}
		const before = strap.length;
		for (let k = first; k <= last; k++) {
			const c = pattern.offsetNm + k * pattern.pitchNm;
			for (const [from, to] of spansOfLine(direction, c, die, regionNm, cuts)) {
				strap.push(s);
				coordinate.push(c);
				start.push(from);
				end.push(to);
			}
		}
		if (strap.length === before) {
			warnings.push({
				code: 'strap-empty',
				message: `straps (${pattern.id}): none of its straps lies on the die; check offset, pitch and region`,
				subject: pattern.id
			});
		}
	}
	return { status: 'drawn', runs: sortRuns(plan, { strap, coordinate, start, end }), warnings };
}

function sortRuns(
	{ patterns, netCount, layerCount }: PlanIndex,
	drawn: { strap: number[]; coordinate: number[]; start: number[]; end: number[] }
): Runs {
	const count = drawn.strap.length;
	const group = drawn.strap.map((s) => patterns[s].net * layerCount + patterns[s].layer);
	const order = Int32Array.from({ length: count }, (_, index) => index).sort(
		(a, b) =>
			group[a] - group[b] ||
			drawn.coordinate[a] - drawn.coordinate[b] ||
			drawn.start[a] - drawn.start[b] ||
			drawn.strap[a] - drawn.strap[b]
	);
	const groupStart = new Int32Array(netCount * layerCount + 1);
	for (const g of group) groupStart[g + 1]++;
	for (let g = 0; g < netCount * layerCount; g++) groupStart[g + 1] += groupStart[g];
	const strap = Int32Array.from(order, (index) => drawn.strap[index]);
	return {
		count,
		strap,
		net: Uint16Array.from(strap, (s) => patterns[s].net),
		layer: Uint8Array.from(strap, (s) => patterns[s].layer),
		coordinateNm: Int32Array.from(order, (index) => drawn.coordinate[index]),
		startNm: Int32Array.from(order, (index) => drawn.start[index]),
		endNm: Int32Array.from(order, (index) => drawn.end[index]),
		groupStart
	};
}
