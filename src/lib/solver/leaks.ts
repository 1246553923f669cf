import type { Circuit } from './circuit.ts';
import type { GridFactors } from './grid-factors.ts';
import { isFlat } from './regulator-law.ts';

/** Slope lent to the units of a part that floats because all of them are flat. */
const FLOATING_LEAK = 1e-4;
/**
 * The same where one piece changes at a time: the level then drifts to the next border at once, which
 * may be far for what is missing.
 */
const DRIFT_LEAK = 1e-9;
/** The slope lent as a part of the slope of the loads there. */
const BESIDE_LOADS = 1e-3;

/**
 * Leak of every unit. A part all of whose units are flat without a leak is lent a small one, which
 * says which way it drifts; where its loads have a slope of their own, one that is small beside it.
 * @param isPivoting whether one piece changes at a time
 * @returns the leaks, and whether some part drifts: nothing there answers to its level
 */
export function leaksOf(
	circuit: Circuit,
	grid: GridFactors,
	piece: Uint8Array,
	leak: number,
	loadSlope: Float64Array,
	isPivoting: boolean
): { readonly leaks: Float64Array; readonly drifts: boolean } {
	const { regulators: units, loads } = circuit;
	const leaks = new Float64Array(units.count).fill(leak);
	const firm = new Set<number>();
	for (let k = 0; k < units.count; k++) {
		if (!isFlat(piece[k])) firm.add(grid.part[units.outputNode[k]]);
	}
	const floating = Array.from(units.outputNode, (node) => !firm.has(grid.part[node]));
	if (leak > 0 || !floating.includes(true)) return { leaks, drifts: false };
	const slopeOf = new Map<number, number>();
	const unitSlopeOf = new Map<number, number>();
	const add = (to: Map<number, number>, node: number, value: number) =>
		to.set(grid.part[node], (to.get(grid.part[node]) ?? 0) + Math.abs(value));
	loads.node.forEach((node, load) => add(slopeOf, node, loadSlope[load]));
	units.outputNode.forEach((node, k) => add(unitSlopeOf, node, 1 / units.outputOhm[k]));
	const lent = isPivoting ? DRIFT_LEAK : FLOATING_LEAK;
	let drifts = false;
	for (let k = 0; k < units.count; k++) {
		if (!floating[k]) continue;
		const part = grid.part[units.outputNode[k]];
		const ratio = (slopeOf.get(part) ?? 0) / (unitSlopeOf.get(part) ?? 1);
		drifts ||= ratio === 0;
		// A power of ten, so that the equations are kept while the loads' slopes move a little.
		const beside = 10 ** Math.floor(Math.log10(BESIDE_LOADS * ratio));
		leaks[k] = ratio === 0 ? lent : Math.min(FLOATING_LEAK, beside);
	}
	return { leaks, drifts };
}
