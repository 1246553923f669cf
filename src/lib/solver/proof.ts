import type { Circuit } from './circuit.ts';
import { volts, type Answer } from './answer.ts';
import type { Proof, RegulatorState } from './operating-point.ts';
import { powerBalance } from './power.ts';
import {
	PIECE_DROPOUT,
	PIECE_IDLE,
	PIECE_LIMITED,
	PIECE_REGULATING,
	PIECE_STARVED,
	currentOn,
	pieceOf,
	type Drive
} from './regulator-law.ts';

/** A current this near to a bound, as a fraction of maxA, stands at it. */
const STATE_TOLERANCE = 1e-9;
/** Voltages that a law ties together may differ by this much, V. */
const VOLTAGE_TOLERANCE_V = 1e-8;

/**
 * Current that leaves every node through straps, vias, feeds, regulators and loads, A. At a right
 * answer it is 0 everywhere.
 */
function leavingCurrents(circuit: Circuit, answer: Answer): Float64Array {
	const { network, ohm, regulators, loads, feeds } = circuit;
	const { voltage } = answer;
	const leaving = new Float64Array(network.nodes.count);
	for (let r = 0; r < network.resistors.count; r++) {
		const a = network.resistors.from[r];
		const b = network.resistors.to[r];
		const amps = (voltage[a] - voltage[b]) / ohm[r];
		leaving[a] += amps;
		leaving[b] -= amps;
	}
	for (let f = 0; f < feeds.count; f++) leaving[feeds.node[f]] -= answer.feedAmps[f];
	for (let k = 0; k < regulators.count; k++) {
		const amps = answer.regulatorAmps[k];
		leaving[regulators.outputNode[k]] -= amps;
		if (regulators.inputNode[k] >= 0) {
			leaving[regulators.inputNode[k]] += amps + regulators.quiescentA[k];
		}
		if (regulators.groundNode[k] >= 0) {
			leaving[regulators.groundNode[k]] -= regulators.quiescentA[k];
		}
	}
	for (let load = 0; load < loads.count; load++) {
		leaving[loads.node[load]] += answer.loadAmps[load];
		if (loads.groundNode[load] >= 0) leaving[loads.groundNode[load]] -= answer.loadAmps[load];
	}
	return leaving;
}

/** The state that a unit's law gives at the answer's voltages, near a bound the bound. */
export function stateOf(circuit: Circuit, answer: Answer, k: number): RegulatorState {
	const { regulators } = circuit;
	const drive = driveOf(circuit, answer, k);
	const { wantedA, fullyOnA } = drive;
	const maxA = regulators.maxA[k];
	const sinkA = regulators.sinkA[k];
	const near = STATE_TOLERANCE * maxA;
	switch (pieceOf(drive, maxA, sinkA, 0)) {
		case PIECE_LIMITED:
			return 'limited';
		case PIECE_IDLE:
			return 'idle';
		case PIECE_DROPOUT:
		case PIECE_STARVED:
			return fullyOnA >= wantedA - near ? 'regulating' : 'dropout';
		case PIECE_REGULATING:
			if (wantedA >= maxA - near) return 'limited';
			return wantedA <= -sinkA + near ? 'idle' : 'regulating';
	}
}

function driveOf(circuit: Circuit, answer: Answer, k: number): Drive {
	const { regulators } = circuit;
	const shift = regulators.sense[k] < 0 ? 0 : answer.correctionV[regulators.sense[k]];
	const set = regulators.setV[k] + shift + volts(answer.voltage, regulators.referenceNode[k]);
	const out = answer.voltage[regulators.outputNode[k]];
	const input = regulators.inputNode[k];
	return {
		wantedA: (set - out) / regulators.outputOhm[k],
		fullyOnA: input < 0 ? Infinity : (answer.voltage[input] - out) / regulators.onOhm[k]
	};
}

/** Whether every reported current and state follows from the voltages by the law. */
function regulatorsConsistent(circuit: Circuit, answer: Answer): boolean {
	const { regulators } = circuit;
	for (let k = 0; k < regulators.count; k++) {
		const drive = driveOf(circuit, answer, k);
		const { wantedA } = drive;
		const maxA = regulators.maxA[k];
		const sinkA = regulators.sinkA[k];
		const piece = pieceOf(drive, maxA, sinkA, 0);
		const lawA = currentOn(piece, drive, maxA, sinkA, 0);
		const tolerance = VOLTAGE_TOLERANCE_V / regulators.outputOhm[k] + STATE_TOLERANCE * maxA;
		const amps = answer.regulatorAmps[k];
		if (Math.abs(amps - lawA) > tolerance) return false;
		const state = answer.regulatorStates[k];
		if (amps > maxA + tolerance || amps < -sinkA - tolerance) return false;
		if (state === 'limited' && Math.abs(amps - maxA) > tolerance) return false;
		if (state === 'idle' && Math.abs(amps + sinkA) > tolerance) return false;
		if (state === 'dropout' && wantedA < amps - tolerance) return false;
		if (state === 'regulating' && Math.abs(amps - wantedA) > tolerance) return false;
		if (state === 'off') return false;
	}
	return true;
}

function sensesConsistent(circuit: Circuit, answer: Answer): boolean {
	return circuit.senses.every((sense, s) => {
		let mean = 0;
		sense.node.forEach((node, point) => {
			const ground = volts(answer.voltage, sense.groundNode[point]);
			mean += sense.weight[point] * (answer.voltage[node] - ground);
		});
		const error = sense.volts - mean;
		const u = answer.correctionV[s];
		if (Math.abs(u) > sense.rangeV + VOLTAGE_TOLERANCE_V) return false;
		if (Math.abs(error) <= VOLTAGE_TOLERANCE_V) return true;
		return Math.abs(u - Math.sign(error) * sense.rangeV) <= VOLTAGE_TOLERANCE_V;
	});
}

/**
 * The proof of an answer, from its voltages and reported currents alone.
 * @param scaleA the current that mismatches are measured against, A
 */
export function proveAnswer(circuit: Circuit, answer: Answer, scaleA: number): Proof {
	let kclMaxA = 0;
	for (const amps of leavingCurrents(circuit, answer)) kclMaxA = Math.max(kclMaxA, Math.abs(amps));
	const { sourceW, nets } = powerBalance(circuit, answer);
	const spentW = nets.reduce(
		(sum, net) => sum + net.gridW + net.feedW + net.regulatorW + net.loadW,
		0
	);
	// Where next to nothing flows, rounding is measured against the current scale at 1 V.
	const largestW = Math.max(Math.abs(sourceW), Math.abs(spentW), 1e-3 * scaleA);
	return {
		kclMaxA,
		kclRelative: kclMaxA / scaleA,
		powerRelative: Math.abs(sourceW - spentW) / largestW,
		statesConsistent: regulatorsConsistent(circuit, answer) && sensesConsistent(circuit, answer)
	};
}
