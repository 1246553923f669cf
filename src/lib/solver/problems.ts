import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { seenRatio } from './capacity.ts';
import type { Circuit } from './circuit.ts';
import { ACCEPTED_RELATIVE, type NewtonResult } from './newton.ts';
import type { Proof, SolveProblem } from './operating-point.ts';

/** Names the block that the iteration could not supply. */
export function stuckProblem(
	floorplan: Floorplan,
	circuit: Circuit,
	newton: NewtonResult
): SolveProblem {
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
		`the load (expected at most ${ACCEPTED_RELATIVE})`;
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

/** Names the place of a part that nothing ties to a source. */
export function floatingProblem(network: Network, node: number): SolveProblem {
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

/** Says how much memory the factor of a net would take. */
export function tooLargeProblem(
	network: Network,
	{ net, bytes, limitBytes }: { net: number; bytes: number; limitBytes: number }
): SolveProblem {
	const gigabytes = (value: number) => `${(value / 1e9).toPrecision(3)} GB`;
	const { id, nodeCount } = network.nets[net];
	return {
		path: `nets (${id})`,
		message:
			`its ${nodeCount} nodes need ${gigabytes(bytes)} of memory for the factor ` +
			`(expected at most ${gigabytes(limitBytes)}: draw fewer straps, or a larger pitch)`,
		subject: id
	};
}

/** Says that an answer was found whose own figures do not hold. */
export function unprovenProblem(proof: Proof, required: number): SolveProblem {
	return {
		path: 'plan',
		message:
			`the answer does not prove itself: Kirchhoff mismatch ${proof.kclRelative.toExponential(3)}, ` +
			`power balance ${proof.powerRelative.toExponential(3)} (expected at most ${required}), states ` +
			(proof.statesConsistent ? 'consistent' : 'not consistent')
	};
}
