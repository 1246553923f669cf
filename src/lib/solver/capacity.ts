import type { Circuit } from './circuit.ts';
import type { Evaluation } from './evaluation.ts';
import type { SolveProblem } from './operating-point.ts';
import { COLLAPSE_FRACTION } from './load-law.ts';

/** Constant current wanted and given in one connected part of a regulated net. */
interface PartBalance {
	readonly net: number;
	readonly part: number;
	wantedA: number;
	/** Sum of maxA. */
	ratedA: number;
	units: number;
	/** Block that draws most of it, by index, and the node where it draws. */
	largest: { block: number; node: number; amps: number } | null;
}

/** Relative excess that counts as more than the units can give. */
const SHORT_TOLERANCE = 1e-9;

function amps(value: number): string {
	return `${Number(value.toPrecision(6))} A`;
}

function balances(circuit: Circuit, part: Int32Array): Map<number, PartBalance> {
	const { network, regulators, loads } = circuit;
	const parts = new Map<number, PartBalance>();
	function balanceAt(node: number): PartBalance {
		const found = parts.get(part[node]) ?? {
			net: network.nodes.net[node],
			part: part[node],
			wantedA: 0,
			ratedA: 0,
			units: 0,
			largest: null
		};
		parts.set(part[node], found);
		return found;
	}
	for (let k = 0; k < regulators.count; k++) {
		const balance = balanceAt(regulators.outputNode[k]);
		balance.ratedA += regulators.maxA[k];
		balance.units++;
	}
	for (let load = 0; load < loads.count; load++) {
		const node = loads.node[load];
		if (network.nets[network.nodes.net[node]].kind !== 'regulated') continue;
		if (loads.exponent[load] !== 0) continue;
		const balance = balanceAt(node);
		balance.wantedA += loads.nominalA[load];
		if (balance.largest === null || loads.nominalA[load] > balance.largest.amps) {
			balance.largest = { block: loads.block[load], node, amps: loads.nominalA[load] };
		}
	}
	return parts;
}

function shortProblem(
	circuit: Circuit,
	balance: PartBalance,
	availableA: number,
	reason: string
): SolveProblem {
	const { id } = circuit.network.nets[balance.net];
	const { nodes } = circuit.network;
	const { largest } = balance;
	return {
		path: `nets (${id})`,
		message:
			`the blocks draw ${amps(balance.wantedA)} of constant current, but the ` +
			`${balance.units} enabled regulators can give ${amps(availableA)}${reason} ` +
			`(expected at least as much as is drawn: add or enable regulators, or lower the load of ` +
			`mode ${circuit.mode.id} in corner ${circuit.corner.id})`,
		subject: id,
		wantedA: balance.wantedA,
		availableA,
		...(largest === null
			? {}
			: { atUm: [nodes.xNm[largest.node] / 1000, nodes.yNm[largest.node] / 1000] as const })
	};
}

/** Parts of regulated nets that draw more constant current than the ratings of their units. */
export function ratedShortages(circuit: Circuit, part: Int32Array): SolveProblem[] {
	return [...balances(circuit, part).values()]
		.filter(({ wantedA, ratedA }) => wantedA > ratedA * (1 + SHORT_TOLERANCE))
		.map((balance) => shortProblem(circuit, balance, balance.ratedA, ''));
}

/**
 * Parts that hold no constant-current operating point although the ratings would do: a constant-
 * current load has collapsed there and every unit gives all it can (limited, or fully on).
 */
export function collapsedShortages(
	circuit: Circuit,
	part: Int32Array,
	voltage: Float64Array,
	evaluation: Evaluation
): SolveProblem[] {
	const { regulators, loads } = circuit;
	const collapsed = new Set<number>();
	for (let load = 0; load < loads.count; load++) {
		if (loads.exponent[load] !== 0 || loads.nominalA[load] <= 0) continue;
		if (seenRatio(circuit, voltage, load) < COLLAPSE_FRACTION)
			collapsed.add(part[loads.node[load]]);
	}
	const givenA = new Map<number, number>();
	const spare = new Set<number>();
	for (let k = 0; k < regulators.count; k++) {
		const at = part[regulators.outputNode[k]];
		givenA.set(at, (givenA.get(at) ?? 0) + evaluation.amps[k]);
		// Wanting no more than it gives: this unit holds its level, so the part is not short.
		if (evaluation.wantedA[k] <= evaluation.amps[k]) spare.add(at);
	}
	return [...balances(circuit, part).values()]
		.filter((balance) => collapsed.has(balance.part) && !spare.has(balance.part))
		.map((balance) =>
			shortProblem(
				circuit,
				balance,
				givenA.get(balance.part) ?? 0,
				' at the input voltage that is left to them'
			)
		);
}

/** Nets with loads but without positive volts: a load's law is a fraction of its net's volts. */
export function voltlessLoads(circuit: Circuit): SolveProblem[] {
	const { network, loads } = circuit;
	const nets = new Set(Array.from(loads.node, (node) => network.nodes.net[node]));
	return [...nets]
		.filter((net) => !(network.nets[net].volts > 0))
		.map((net) => {
			const { id, volts } = network.nets[net];
			return {
				path: `nets (${id}).volts`,
				message: `${volts} V with blocks on the net (expected more than 0 V)`,
				subject: id
			};
		});
}

/** Voltage that a load attachment sees over its nominal volts. */
export function seenRatio(circuit: Circuit, voltage: Float64Array, load: number): number {
	const { loads } = circuit;
	const ground = loads.groundNode[load];
	const seen = voltage[loads.node[load]] - (ground < 0 ? 0 : voltage[ground]);
	return seen / loads.volts[load];
}

/** Indices of the blocks that see less than a tenth of nominal at some node. */
export function collapsedBlocks(circuit: Circuit, voltage: Float64Array): number[] {
	const found = new Set<number>();
	for (let load = 0; load < circuit.loads.count; load++) {
		if (circuit.loads.nominalA[load] === 0) continue;
		if (seenRatio(circuit, voltage, load) < COLLAPSE_FRACTION) {
			found.add(circuit.loads.block[load]);
		}
	}
	return [...found].sort((a, b) => a - b);
}
