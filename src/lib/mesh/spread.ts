import type { Block, CurrentMap } from '#lib/floorplan/index.ts';
import { boundsOf, polygonRectangleArea } from '#lib/geometry/index.ts';
import type { Bounds, Outline } from '#lib/geometry/index.ts';
import { outlineToNm, type StrapPattern } from './plan-index.ts';
import type { Points } from './points.ts';
import { rectanglesOf } from './rectangles.ts';
import type { Runs } from './runs.ts';
import { lowerBound } from './search.ts';

/**
 * How a block's current lies over the die: rectangles of even density, or a function that gives
 * the amount within a rectangle. Only ratios of amounts count.
 */
type Density =
	| { readonly kind: 'rectangles'; readonly bounds: Bounds; readonly rectangles: readonly Bounds[] }
	| {
			readonly kind: 'integral';
			readonly bounds: Bounds;
			readonly amountIn: (minX: number, minY: number, maxX: number, maxY: number) => number;
	  };

/** Amount of a current map, laid over `bounds` row by row from the lower left, in a rectangle. */
function mapAmount(map: CurrentMap, bounds: Bounds): Extract<Density, { kind: 'integral' }> {
	const { columns, rows, weights } = map;
	const perColumn = (bounds.maxX - bounds.minX) / columns;
	const perRow = (bounds.maxY - bounds.minY) / rows;
	function amountIn(minX: number, minY: number, maxX: number, maxY: number): number {
		// In units of the map's own cells.
		const left = Math.max(0, (minX - bounds.minX) / perColumn);
		const right = Math.min(columns, (maxX - bounds.minX) / perColumn);
		const bottom = Math.max(0, (minY - bounds.minY) / perRow);
		const top = Math.min(rows, (maxY - bounds.minY) / perRow);
		let amount = 0;
		for (let row = Math.floor(bottom); row < top; row++) {
			const height = Math.min(top, row + 1) - Math.max(bottom, row);
			for (let column = Math.floor(left); column < right; column++) {
				const width = Math.min(right, column + 1) - Math.max(left, column);
				amount += weights[row * columns + column] * width * height;
			}
		}
		return amount;
	}
	return { kind: 'integral', bounds, amountIn };
}

function densityOf(block: Block): Density {
	const outline: Outline = outlineToNm(block.outline);
	const bounds = boundsOf(outline);
	if (block.spread !== 'uniform') return mapAmount(block.spread, bounds);
	const rectangles = rectanglesOf(outline);
	if (rectangles !== null) return { kind: 'rectangles', bounds, rectangles };
	return {
		kind: 'integral',
		bounds,
		amountIn: (minX, minY, maxX, maxY) => polygonRectangleArea(outline, { minX, minY, maxX, maxY })
	};
}

/**
 * Shares of a block below this are rounding of the clipping at a cell that only touches it: one part
 * in 1e15 of the largest die is less than a square nanometre of a block of a square millimetre.
 */
const NEGLIGIBLE_SHARE = 1e-15;

/** The group of runs that a block's current goes to. */
export interface SpreadTarget {
	readonly runs: Runs;
	readonly points: Points;
	readonly patterns: readonly StrapPattern[];
	/** Runs [from, to) of one group. */
	readonly from: number;
	readonly to: number;
	readonly isHorizontal: boolean;
	/** Largest pitch among these runs, nm. */
	readonly maxPitchNm: number;
	/** 1 for the runs that may carry load. Length `runs.count`. */
	readonly isIncluded: Uint8Array;
}

/**
 * Collects how much of a block lies in each point's own cell: half way to its neighbours along the
 * run, to the run's end where it has none, half a pitch to each side. One instance serves many
 * blocks; each use leaves it empty.
 */
export class BlockSpreader {
	/** Amount by point; zero outside `#touched`. */
	readonly #amount: Float64Array;
	#touched: number[] = [];

	constructor(pointCount: number) {
		this.#amount = new Float64Array(pointCount);
	}

	/** Points that carry part of the block and their shares, which sum to 1; empty where none does. */
	spread(block: Block, target: SpreadTarget): { points: Int32Array; shares: Float64Array } {
		const density = densityOf(block);
		if (density.kind === 'rectangles') {
			for (const rectangle of density.rectangles) this.#add(target, rectangle, null);
		} else {
			this.#add(target, density.bounds, density.amountIn);
		}
		const amount = this.#amount;
		const touched = Int32Array.from(this.#touched).sort();
		const least = NEGLIGIBLE_SHARE * compensatedSum(touched, amount);
		const points = touched.filter((p) => amount[p] > least);
		const total = compensatedSum(points, amount);
		const shares = new Float64Array(points.length);
		for (let i = 0; i < points.length; i++) shares[i] = amount[points[i]] / total;
		for (const p of touched) amount[p] = 0;
		this.#touched = [];
		return { points, shares };
	}

	/** Adds the amount within `box` of every cell that meets it; the area itself without a function. */
	#add(
		target: SpreadTarget,
		box: Bounds,
		amountIn: Extract<Density, { kind: 'integral' }>['amountIn'] | null
	): void {
		const { runs, points, patterns, isHorizontal, isIncluded } = target;
		const { coordinateNm, startNm, endNm } = runs;
		const position = points.alongNm;
		const amount = this.#amount;
		const alongLow = isHorizontal ? box.minX : box.minY;
		const alongHigh = isHorizontal ? box.maxX : box.maxY;
		const acrossLow = isHorizontal ? box.minY : box.minX;
		const acrossHigh = isHorizontal ? box.maxY : box.maxX;
		const reach = target.maxPitchNm / 2;
		let run = lowerBound(coordinateNm, target.from, target.to, acrossLow - reach);
		for (; run < target.to && coordinateNm[run] <= acrossHigh + reach; run++) {
			if (isIncluded[run] === 0) continue;
			const half = patterns[runs.strap[run]].pitchNm / 2;
			const bottom = Math.max(coordinateNm[run] - half, acrossLow);
			const top = Math.min(coordinateNm[run] + half, acrossHigh);
			if (bottom >= top || endNm[run] <= alongLow || startNm[run] >= alongHigh) continue;
			const first = points.start[run];
			const last = points.start[run + 1] - 1;
			let p = Math.max(first, lowerBound(position, first, last + 1, alongLow) - 1);
			for (; p <= last; p++) {
				const cellLow = p === first ? position[p] : (position[p - 1] + position[p]) / 2;
				if (cellLow >= alongHigh) break;
				const cellHigh = p === last ? position[p] : (position[p] + position[p + 1]) / 2;
				const low = cellLow > alongLow ? cellLow : alongLow;
				const high = cellHigh < alongHigh ? cellHigh : alongHigh;
				if (low >= high) continue;
				const part =
					amountIn === null
						? (high - low) * (top - bottom)
						: isHorizontal
							? amountIn(low, bottom, high, top)
							: amountIn(bottom, low, top, high);
				if (part <= 0) continue;
				if (amount[p] === 0) this.#touched.push(p);
				amount[p] += part;
			}
		}
	}
}

/** Neumaier's compensated sum (1974), so that shares of half a million points still add up to 1. */
function compensatedSum(indices: Int32Array, values: Float64Array): number {
	let sum = 0;
	let lost = 0;
	for (const index of indices) {
		const value = values[index];
		const next = sum + value;
		lost += sum >= value ? sum - next + value : value - next + sum;
		sum = next;
	}
	return sum + lost;
}
