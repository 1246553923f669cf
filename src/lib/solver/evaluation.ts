import type { Circuit } from './circuit.ts';
import { loadCurrent, loadSlope } from './load-law.ts';
import { currentOn, pieceOf } from './regulator-law.ts';

/** The unknowns. */
export interface Unknowns {
	/** Voltage of every node; held nodes keep their source's volts. */
	readonly voltage: Float64Array;
	/** Shared correction of every sense loop, V. */
	readonly correction: Float64Array;
}

/** The unknowns after the part `t` of a step. */
export function moved({ voltage, correction }: Unknowns, step: Unknowns, t: number): Unknowns {
	return {
		voltage: voltage.map((value, node) => value + t * step.voltage[node]),
		correction: correction.map((value, s) => value + t * step.correction[s])
	};
}

/** A loop holds the mean, or stands at the lower or upper end of its range. */
export const LOOP_LOW = -1;
export const LOOP_HOLDING = 0;
export const LOOP_HIGH = 1;

/** Laws and mismatches at one set of unknowns. */
export interface Evaluation {
	/** Per enabled regulator: wanted and fully-on current, piece of the law, current, A. */
	readonly wantedA: Float64Array;
	readonly fullyOnA: Float64Array;
	readonly piece: Uint8Array;
	readonly amps: Float64Array;
	/** Per load attachment: current, A, and slope, A per V. */
	readonly loadAmps: Float64Array;
	readonly loadSlope: Float64Array;
	/** Per sense loop: nominal minus mean, V; which end it stands at; what is left to correct, V. */
	readonly senseErrorV: Float64Array;
	readonly loop: Int8Array;
	readonly senseMismatchV: Float64Array;
	/** Current into every node that nothing takes away, A; 0 at held nodes. */
	readonly mismatchA: Float64Array;
	/** Largest entry of `mismatchA`. */
	readonly maxMismatchA: number;
	/** Square root of the sum of squares, the loops' part weighted by `senseWeight`. */
	readonly merit: number;
}

/** Volts at a node, 0 for an ideal ground (-1). */
function at(voltage: Float64Array, node: number): number {
	return node < 0 ? 0 : voltage[node];
}

/** Wanted and fully-on current of every enabled regulator, A. */
export function regulatorDrives(
	circuit: Circuit,
	{ voltage, correction }: Unknowns
): { wantedA: Float64Array; fullyOnA: Float64Array } {
	const units = circuit.regulators;
	const wantedA = new Float64Array(units.count);
	const fullyOnA = new Float64Array(units.count);
	for (let k = 0; k < units.count; k++) {
		const shift = units.sense[k] < 0 ? 0 : correction[units.sense[k]];
		const out = voltage[units.outputNode[k]];
		const set = units.setV[k] + shift + at(voltage, units.referenceNode[k]);
		wantedA[k] = (set - out) / units.outputOhm[k];
		const input = units.inputNode[k];
		fullyOnA[k] = input < 0 ? Infinity : (voltage[input] - out) / units.onOhm[k];
	}
	return { wantedA, fullyOnA };
}

/** Nominal minus the weighted mean at the sense points, V, per loop. */
export function senseErrors(circuit: Circuit, voltage: Float64Array): Float64Array {
	return Float64Array.from(circuit.senses, (sense) => {
		let mean = 0;
		for (let point = 0; point < sense.node.length; point++) {
			const seen = voltage[sense.node[point]] - at(voltage, sense.groundNode[point]);
			mean += sense.weight[point] * seen;
		}
		return sense.volts - mean;
	});
}

/** Conductance that turns a loop's volts into amperes in the merit: that of its net's units. */
function senseWeights(circuit: Circuit): Float64Array {
	const weights = new Float64Array(circuit.senses.length);
	const units = circuit.regulators;
	for (let k = 0; k < units.count; k++) {
		if (units.sense[k] >= 0) weights[units.sense[k]] += 1 / units.outputOhm[k];
	}
	return weights;
}

/** Adds the currents of straps, vias and feeds into every node. */
function addGridCurrents(circuit: Circuit, voltage: Float64Array, into: Float64Array): void {
	const { resistors } = circuit.network;
	for (let r = 0; r < resistors.count; r++) {
		const from = resistors.from[r];
		const to = resistors.to[r];
		const amps = (voltage[from] - voltage[to]) / circuit.ohm[r];
		into[from] -= amps;
		into[to] += amps;
	}
	const { feeds } = circuit;
	for (let f = 0; f < feeds.count; f++) {
		if (feeds.seriesOhm[f] === 0) continue;
		into[feeds.node[f]] += (feeds.volts[f] - voltage[feeds.node[f]]) / feeds.seriesOhm[f];
	}
}

function addRegulatorCurrents(circuit: Circuit, amps: Float64Array, into: Float64Array): void {
	const units = circuit.regulators;
	for (let k = 0; k < units.count; k++) {
		into[units.outputNode[k]] += amps[k];
		if (units.inputNode[k] >= 0) into[units.inputNode[k]] -= amps[k] + units.quiescentA[k];
		if (units.groundNode[k] >= 0) into[units.groundNode[k]] += units.quiescentA[k];
	}
}

/**
 * Laws, pieces and mismatches at the given unknowns.
 * @param leak slope of the regulators' flat pieces, see `pieceOf`; 0 for the law itself
 */
export function evaluate(circuit: Circuit, unknowns: Unknowns, leak: number): Evaluation {
	const { voltage, correction } = unknowns;
	const { regulators: units, loads, senses, held } = circuit;
	const { wantedA, fullyOnA } = regulatorDrives(circuit, unknowns);
	const piece = new Uint8Array(units.count);
	const amps = new Float64Array(units.count);
	for (let k = 0; k < units.count; k++) {
		const drive = { wantedA: wantedA[k], fullyOnA: fullyOnA[k] };
		piece[k] = pieceOf(drive, units.maxA[k], units.sinkA[k], leak);
		amps[k] = currentOn(piece[k], drive, units.maxA[k], units.sinkA[k], leak);
	}

	const mismatchA = new Float64Array(voltage.length);
	addGridCurrents(circuit, voltage, mismatchA);
	addRegulatorCurrents(circuit, amps, mismatchA);
	const loadAmps = new Float64Array(loads.count);
	const slope = new Float64Array(loads.count);
	for (let load = 0; load < loads.count; load++) {
		const node = loads.node[load];
		const ground = loads.groundNode[load];
		const seen = voltage[node] - at(voltage, ground);
		const nominal = loads.nominalA[load];
		loadAmps[load] = loadCurrent(nominal, seen, loads.volts[load], loads.exponent[load]);
		slope[load] = loadSlope(nominal, seen, loads.volts[load], loads.exponent[load]);
		mismatchA[node] -= loadAmps[load];
		if (ground >= 0) mismatchA[ground] += loadAmps[load];
	}

	const senseErrorV = senseErrors(circuit, voltage);
	const loop = new Int8Array(senses.length);
	const senseMismatchV = new Float64Array(senses.length);
	const weights = senseWeights(circuit);
	let squares = 0;
	for (let s = 0; s < senses.length; s++) {
		// The loop's complementarity as one equation: u = the nearest value in range to u + error.
		const { rangeV } = senses[s];
		const target = correction[s] + senseErrorV[s];
		loop[s] = target >= rangeV ? LOOP_HIGH : target <= -rangeV ? LOOP_LOW : LOOP_HOLDING;
		senseMismatchV[s] = Math.min(Math.max(target, -rangeV), rangeV) - correction[s];
		squares += (weights[s] * senseMismatchV[s]) ** 2;
	}
	let maxMismatchA = 0;
	for (let node = 0; node < mismatchA.length; node++) {
		if (held[node] === 1) {
			mismatchA[node] = 0;
			continue;
		}
		maxMismatchA = Math.max(maxMismatchA, Math.abs(mismatchA[node]));
		squares += mismatchA[node] * mismatchA[node];
	}
	return {
		wantedA,
		fullyOnA,
		piece,
		amps,
		loadAmps,
		loadSlope: slope,
		senseErrorV,
		loop,
		senseMismatchV,
		mismatchA,
		maxMismatchA: Number.isNaN(squares) ? Infinity : maxMismatchA,
		merit: Number.isNaN(squares) ? Infinity : Math.sqrt(squares)
	};
}

/**
 * The current that mismatches are measured against, A: the total load, or the largest current that
 * flows at all where nothing is drawn, and never less than 1 mA.
 */
export function currentScale(circuit: Circuit, evaluation: Evaluation): number {
	const sum = (values: Float64Array) => values.reduce((total, value) => total + Math.abs(value), 0);
	const load = sum(evaluation.loadAmps);
	if (load > 0) return load;
	return Math.max(sum(evaluation.amps), sum(circuit.regulators.quiescentA), 1e-3);
}
