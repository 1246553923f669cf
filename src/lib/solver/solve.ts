import type { Floorplan } from '#lib/floorplan/index.ts';
import { resistancesAt, type Network } from '#lib/mesh/index.ts';
import {
	collapsedBlocks,
	collapsedShortages,
	ratedShortages,
	seenRatio,
	voltlessLoads
} from './capacity.ts';
import { buildCircuit, type Circuit } from './circuit.ts';
import { currentScale } from './evaluation.ts';
import { createGridCache } from './grid-cache.ts';
import type { GridFactors } from './grid-factors.ts';
import type { NewtonResult } from './newton.ts';
import type {
	OperatingPoint,
	Proof,
	RegulatorState,
	SenseAnswer,
	SolveOptions,
	SolveOutcome,
	SolveProblem,
	SolveWarning
} from './operating-point.ts';
import type { Answer } from './answer.ts';
import { powerBalance, regulatorLosses } from './power.ts';
import { proveAnswer, stateOf } from './proof.ts';
import { PIECE_REGULATING } from './regulator-law.ts';
import { solveFromStarts } from './start.ts';

/** What the contract asks of every result. */
const REQUIRED_RELATIVE = 1e-6;
/** A loop this near to the end of its range stands there, V. */
const RANGE_TOLERANCE_V = 1e-9;

const METHOD = 'semismooth Newton, nested-dissection Cholesky per net, regulator ports';

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
function residualOf(circuit: Circuit, newton: NewtonResult): number {
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

/** Names the block that the iteration could not supply. */
function stuckProblem(floorplan: Floorplan, circuit: Circuit, newton: NewtonResult): SolveProblem {
	const { loads, network } = circuit;
	let lowest = -1;
	let ratio = Infinity;
	for (let load = 0; load < loads.count; load++) {
		if (loads.nominalA[load] === 0) continue;
		const seen = seenRatio(circuit, newton.unknowns.voltage, load);
		if (seen < ratio) [lowest, ratio] = [load, seen];
	}
	const reached =
		`no operating point was found in ${newton.steps} steps; the best mismatch is ` +
		`${newton.evaluation.maxMismatchA.toExponential(3)} A, ${newton.relative.toExponential(3)} of ` +
		`the load (expected at most ${TARGET_TEXT})`;
	if (lowest < 0) return { path: 'plan', message: reached };
	const { id } = floorplan.blocks[loads.block[lowest]];
	const node = loads.node[lowest];
	return {
		path: `blocks (${id})`,
		message:
			`${reached}; the block sees ${(100 * ratio).toPrecision(3)} % of its nominal volts there, ` +
			`so it may draw more than its rail can bring`,
		subject: id,
		atUm: [network.nodes.xNm[node] / 1000, network.nodes.yNm[node] / 1000]
	};
}

const TARGET_TEXT = '1e-9';

function floatingProblem(network: Network, node: number): SolveProblem {
	const { id } = network.nets[network.nodes.net[node]];
	return {
		path: `nets (${id})`,
		message:
			'a part of the net has no source that ties it to a voltage ' +
			'(expected a feed or an enabled regulator on every connected part)',
		subject: id,
		atUm: [network.nodes.xNm[node] / 1000, network.nodes.yNm[node] / 1000]
	};
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

function operatingPoint(
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

/** Finds an item by id, or the first; a wrong id is a programmer's mistake. */
function itemById<T extends { readonly id: string }>(list: readonly T[], id?: string): T {
	const found = id === undefined ? list[0] : list.find((item) => item.id === id);
	if (found === undefined) throw new RangeError(`there is no item "${id}" in the plan`);
	return found;
}

/**
 * The static operating point of one mode and corner: every node voltage, regulator current and
 * state, load current and loop correction, with the figures that prove it. `unsolvable` says what a
 * person can mend; `not-converged` carries the best mismatch; neither carries voltages.
 */
export function solveOperatingPoint(
	floorplan: Floorplan,
	network: Network,
	options: SolveOptions
): SolveOutcome {
	const { now, onProgress, shouldStop } = options;
	const begin = now();
	onProgress?.({ phase: 'setup' });
	const mode = itemById(floorplan.modes, options.mode);
	const corner = itemById(floorplan.corners, options.corner);
	const scaled = resistancesAt(network, floorplan, corner);
	if (scaled.status === 'refused') return { status: 'unsolvable', problems: scaled.problems };
	const circuit = buildCircuit(floorplan, network, mode, corner, scaled.ohm);
	const cache = options.cache ?? createGridCache(network);
	const voltless = voltlessLoads(circuit);
	if (voltless.length > 0) return { status: 'unsolvable', problems: voltless };
	const short = ratedShortages(circuit, cache.pattern.part);
	if (short.length > 0) return { status: 'unsolvable', problems: short };
	if (shouldStop?.() === true) return { status: 'stopped' };

	onProgress?.({ phase: 'factor' });
	const factored = cache.factors(circuit);
	if (factored.status === 'floating') {
		return { status: 'unsolvable', problems: [floatingProblem(network, factored.node)] };
	}
	if (factored.status === 'too-large') {
		const gigabytes = (bytes: number) => `${(bytes / 1e9).toPrecision(3)} GB`;
		const { id, nodeCount } = network.nets[factored.net];
		return {
			status: 'unsolvable',
			problems: [
				{
					path: `nets (${id})`,
					message:
						`its ${nodeCount} nodes need ${gigabytes(factored.bytes)} of memory for the factor ` +
						`(expected at most ${gigabytes(factored.limitBytes)}: draw fewer straps, or a larger pitch)`,
					subject: id
				}
			]
		};
	}
	const grid: GridFactors = factored.grid;
	if (shouldStop?.() === true) return { status: 'stopped' };
	const solving = now();

	const newton = solveFromStarts(circuit, grid, {
		shouldStop,
		onStep: (step, mismatch) => onProgress?.({ phase: 'solve', step, mismatch })
	});
	if (newton.status === 'stopped') return { status: 'stopped' };
	const starved = collapsedShortages(
		circuit,
		grid.part,
		newton.unknowns.voltage,
		newton.evaluation
	);
	if (starved.length > 0) return { status: 'unsolvable', problems: starved };
	if (newton.status === 'stuck') {
		return {
			status: 'not-converged',
			problems: [stuckProblem(floorplan, circuit, newton)],
			kclMaxA: newton.evaluation.maxMismatchA,
			kclRelative: newton.relative,
			newtonSteps: newton.steps
		};
	}

	onProgress?.({ phase: 'proof' });
	const point = operatingPoint(floorplan, circuit, newton);
	const { proof } = point;
	if (!(proof.kclRelative <= REQUIRED_RELATIVE && proof.powerRelative <= REQUIRED_RELATIVE)) {
		return {
			status: 'not-converged',
			problems: [
				{
					path: 'plan',
					message:
						`the answer does not prove itself: Kirchhoff mismatch ` +
						`${proof.kclRelative.toExponential(3)}, power balance ` +
						`${proof.powerRelative.toExponential(3)} (expected at most ${REQUIRED_RELATIVE})`
				}
			],
			kclMaxA: proof.kclMaxA,
			kclRelative: proof.kclRelative,
			newtonSteps: newton.steps
		};
	}
	const end = now();
	return {
		status: 'solved',
		point: {
			...point,
			statistics: {
				method: METHOD,
				newtonSteps: newton.steps,
				iterations: newton.iterations,
				residual: residualOf(circuit, newton),
				setupSeconds: solving - begin,
				solveSeconds: end - solving
			}
		}
	};
}
