import { volts, type Answer } from './answer.ts';
import type { Circuit } from './circuit.ts';
import type { PowerOfNet } from './operating-point.ts';

/** Volts of the source behind a regulator's input pin; an ideal input stands at the set point. */
function inputVolts(circuit: Circuit, answer: Answer, k: number): number {
	const { regulators } = circuit;
	if (regulators.inputNode[k] >= 0) return answer.voltage[regulators.inputNode[k]];
	const shift = regulators.sense[k] < 0 ? 0 : answer.correctionV[regulators.sense[k]];
	return regulators.setV[k] + shift + volts(answer.voltage, regulators.referenceNode[k]);
}

/** Loss of every enabled regulator, quiescent current included, W. */
export function regulatorLosses(circuit: Circuit, answer: Answer): Float64Array {
	const { regulators } = circuit;
	return answer.regulatorAmps.map((amps, k) => {
		const input = inputVolts(circuit, answer, k);
		const ground = volts(answer.voltage, regulators.groundNode[k]);
		const out = answer.voltage[regulators.outputNode[k]];
		return (input - out) * amps + (input - ground) * regulators.quiescentA[k];
	});
}

/**
 * The power balance (Tellegen). Sources are the feeds of input nets at their volts, and ideal inputs,
 * which are read as sources at their regulator's own set point; a ground feed's source is 0 V and
 * gives nothing.
 */
export function powerBalance(
	circuit: Circuit,
	answer: Answer
): { sourceW: number; nets: PowerOfNet[] } {
	const { network, ohm, regulators, loads, feeds } = circuit;
	const { voltage } = answer;
	const netOf = network.nodes.net;
	const nets = network.nets.map(() => ({ loadW: 0, regulatorW: 0, gridW: 0, feedW: 0 }));
	let sourceW = 0;
	for (let r = 0; r < network.resistors.count; r++) {
		const from = network.resistors.from[r];
		const across = voltage[from] - voltage[network.resistors.to[r]];
		nets[netOf[from]].gridW += (across * across) / ohm[r];
	}
	for (let f = 0; f < feeds.count; f++) {
		const amps = answer.feedAmps[f];
		sourceW += feeds.volts[f] * amps;
		nets[netOf[feeds.node[f]]].feedW += amps * amps * feeds.seriesOhm[f];
	}
	regulatorLosses(circuit, answer).forEach((watts, k) => {
		nets[regulators.net[k]].regulatorW += watts;
		if (regulators.inputNode[k] >= 0) return;
		const amps = answer.regulatorAmps[k] + regulators.quiescentA[k];
		sourceW += inputVolts(circuit, answer, k) * amps;
	});
	for (let load = 0; load < loads.count; load++) {
		const seen = voltage[loads.node[load]] - volts(voltage, loads.groundNode[load]);
		nets[netOf[loads.node[load]]].loadW += seen * answer.loadAmps[load];
	}
	return { sourceW, nets };
}
