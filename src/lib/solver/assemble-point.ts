import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Answer } from './answer.ts';
import { collapsedBlocks } from './capacity.ts';
import type { Circuit } from './circuit.ts';
import { currentScale } from './evaluation.ts';
import type { NewtonResult } from './newton.ts';
import type {
	OperatingPoint,
	Proof,
	RegulatorState,
	SenseAnswer,
	SolveWarning
} from './operating-point.ts';
import { powerBalance, regulatorLosses } from './power.ts';
import { proveAnswer, stateOf } from './proof.ts';
import { PIECE_REGULATING } from './regulator-law.ts';

/** A loop this near to the end of its range stands there, V. */
const RANGE_TOLERANCE_V = 1e-9;

/**
 * Currents of the circuit's feeds, A, positive from the source into the net. The feed of a held node
 * gives what the rest of the node takes; feeds without resistance on one node share it equally.
 */
function feedCurrents(circuit: Circuit, newton: NewtonResult): Float64Array {
	const { network, feeds, held, regulators, loads } = circuit;
	const { voltage } = newton.unknowns;
	const taken = new Map<number, number>();
	const take = (node: number, current: number) => {
		if (node >= 0 && held[node] === 1) taken.set(node, (taken.get(node) ?? 0) + current);
	};
	for (let r = 0; r < network.resistors.count; r++) {
		const from = network.resistors.from[r];
		const to = network.resistors.to[r];
		if (held[from] === 0 && held[to] === 0) continue;
		const current = (voltage[from] - voltage[to]) / circuit.ohm[r];
		take(from, current);
		take(to, -current);
	}
	for (let load = 0; load < loads.count; load++) {
		take(loads.node[load], newton.evaluation.loadAmps[load]);
		take(loads.groundNode[load], -newton.evaluation.loadAmps[load]);
	}
	for (let k = 0; k < regulators.count; k++) {
		take(regulators.outputNode[k], -newton.evaluation.amps[k]);
		take(regulators.inputNode[k], newton.evaluation.amps[k] + regulators.quiescentA[k]);
		take(regulators.groundNode[k], -regulators.quiescentA[k]);
	}
	const sharers = new Map<number, number>();
	const currents = new Float64Array(feeds.count);
	for (let f = 0; f < feeds.count; f++) {
		const node = feeds.node[f];
		if (feeds.seriesOhm[f] === 0) {
			sharers.set(node, (sharers.get(node) ?? 0) + 1);
		} else {
			currents[f] = (feeds.volts[f] - voltage[node]) / feeds.seriesOhm[f];
			take(node, -currents[f]);
		}
	}
	for (let f = 0; f < feeds.count; f++) {
		if (feeds.seriesOhm[f] !== 0) continue;
		const node = feeds.node[f];
		currents[f] = (taken.get(node) ?? 0) / (sharers.get(node) ?? 1);
	}
	return currents;
}

/**
 * True relative residual of the linear system that the answer solves: norm(i - G v) / norm(i), i the
 * currents that loads, regulators and sources inject.
 */
export function residualOf(circuit: Circuit, newton: NewtonResult): number {
	const { evaluation } = newton;
	const { network, feeds, regulators, loads, held } = circuit;
	const { voltage } = newton.unknowns;
	const injected = new Float64Array(network.nodes.count);
	for (let r = 0; r < network.resistors.count; r++) {
		const from = network.resistors.from[r];
		const to = network.resistors.to[r];
		if (held[from] === 1) injected[to] += voltage[from] / circuit.ohm[r];
		if (held[to] === 1) injected[from] += voltage[to] / circuit.ohm[r];
	}
	for (let f = 0; f < feeds.count; f++) {
		if (feeds.seriesOhm[f] > 0) injected[feeds.node[f]] += feeds.volts[f] / feeds.seriesOhm[f];
	}
	for (let k = 0; k < regulators.count; k++) {
		injected[regulators.outputNode[k]] += evaluation.amps[k];
		if (regulators.inputNode[k] >= 0) injected[regulators.inputNode[k]] -= evaluation.amps[k];
	}
	for (let load = 0; load < loads.count; load++) {
		injected[loads.node[load]] -= evaluation.loadAmps[load];
		if (loads.groundNode[load] >= 0) injected[loads.groundNode[load]] += evaluation.loadAmps[load];
	}
	// Held nodes are no unknowns: their rows are not part of the system.
	const norm = (values: Float64Array) =>
		Math.sqrt(values.reduce((sum, v, node) => (held[node] === 1 ? sum : sum + v * v), 0));
	const size = norm(injected);
	return size === 0 ? 0 : norm(evaluation.mismatchA) / size;
}

function senseAnswers(circuit: Circuit, newton: NewtonResult): SenseAnswer[] {
	return circuit.senses.map((sense, s): SenseAnswer => {
		const correctionV = newton.unknowns.correction[s];
		const errorV = newton.evaluation.senseErrorV[s];
		const atEnd = Math.abs(correctionV) >= sense.rangeV - RANGE_TOLERANCE_V;
		return {
			net: sense.net,
			correctionV,
			errorV,
			state: atEnd && Math.abs(errorV) > RANGE_TOLERANCE_V ? 'at-range' : 'holding'
		};
	});
}

function senseWarnings(circuit: Circuit, newton: NewtonResult): SolveWarning[] {
	return senseAnswers(circuit, newton).flatMap((answer, s): SolveWarning[] => {
		if (answer.state === 'holding') return [];
		const { id } = circuit.network.nets[answer.net];
		const rest = `${(answer.errorV * 1000).toPrecision(4)} mV of error are left`;
		const stands =
			`the slow loop stands at the end of its range, ` +
			`${(answer.correctionV * 1000).toPrecision(4)} mV; ${rest}`;
		const followed = circuit.regulators.sense.some(
			(sense, k) => sense === s && newton.evaluation.piece[k] === PIECE_REGULATING
		);
		return !followed
			? [
					{
						code: 'sense-powerless',
						message: `nets (${id}): no regulator follows its set point (all stand at a bound); ${stands}`,
						subject: id
					}
				]
			: [{ code: 'sense-at-range', message: `nets (${id}): ${stands}`, subject: id }];
	});
}

function spreadUnits<T>(circuit: Circuit, count: number, rest: T, values: ArrayLike<T>): T[] {
	const spread = Array.from({ length: count }, () => rest);
	circuit.regulators.unit.forEach((unit, k) => (spread[unit] = values[k]));
	return spread;
}

/** Set points of all units; one that is off shows what it would have. */
function setPoints(floorplan: Floorplan, circuit: Circuit, correction: Float64Array): Float64Array {
	const netIndex = new Map(circuit.network.nets.map((net, index) => [net.id, index]));
	return Float64Array.from(floorplan.regulators, (unit) => {
		const net = netIndex.get(unit.output);
		if (net === undefined) return unit.offsetV;
		const s = circuit.senses.findIndex((sense) => sense.net === net);
		const shift = s < 0 ? 0 : correction[s];
		return circuit.network.nets[net].volts + unit.offsetV + shift;
	});
}

/** Everything that is reported of a converged iteration, with its proof; the statistics are the caller's. */
export function assemblePoint(
	floorplan: Floorplan,
	circuit: Circuit,
	newton: NewtonResult
): Omit<OperatingPoint, 'statistics'> {
	const { network } = circuit;
	const { voltage, correction } = newton.unknowns;
	const feedAmps = feedCurrents(circuit, newton);
	const bare = {
		voltage,
		correctionV: correction,
		regulatorAmps: newton.evaluation.amps,
		loadAmps: newton.evaluation.loadAmps,
		feedAmps
	};
	const undecided: Answer = { ...bare, regulatorStates: [] };
	const { sourceW, nets: power } = powerBalance(circuit, undecided);
	const losses = regulatorLosses(circuit, undecided);
	const states = Array.from(newton.evaluation.amps, (_, k) => stateOf(circuit, undecided, k));
	const proof: Proof = proveAnswer(
		circuit,
		{ ...bare, regulatorStates: states },
		currentScale(circuit, newton.evaluation)
	);
	const reported = new Float64Array(floorplan.feeds.length);
	circuit.feeds.feed.forEach((feed, f) => {
		const ground = network.nets[network.nodes.net[circuit.feeds.node[f]]].kind === 'ground';
		reported[feed] = ground ? -feedAmps[f] : feedAmps[f];
	});
	const count = floorplan.regulators.length;
	return {
		mode: circuit.mode.id,
		corner: circuit.corner.id,
		voltage,
		resistorOhm: circuit.ohm,
		nominalV: circuit.nominalV,
		regulatorAmps: Float64Array.from(spreadUnits(circuit, count, 0, newton.evaluation.amps)),
		regulatorStates: spreadUnits<RegulatorState>(circuit, count, 'off', states),
		regulatorSetV: setPoints(floorplan, circuit, correction),
		loadAmps: newton.evaluation.loadAmps,
		feedAmps: reported,
		regulatorLossW: Float64Array.from(spreadUnits(circuit, count, 0, losses)),
		sourceW,
		power,
		sense: senseAnswers(circuit, newton),
		collapsedBlocks: collapsedBlocks(circuit, voltage),
		proof,
		warnings: [...network.warnings, ...senseWarnings(circuit, newton)]
	};
}
