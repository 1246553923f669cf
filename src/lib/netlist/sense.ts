import type { Floorplan } from '#lib/floorplan/index.ts';
import { senseProbes, type Network } from '#lib/mesh/index.ts';
import { beyond, nameOf, startingFrom, voltageOf, WALL } from './expressions.ts';
import { safeIds } from './names.ts';
import type { DeckStart } from './start.ts';

/**
 * Leak of the node that stands for a slow loop's correction, ohm. Where every unit of the net stands
 * at a bound the correction moves nothing, and without a leak the equations would be singular. Less
 * of it would cost digits where a simulator has ordered its equations in such a state; this much
 * moves the mean by 1e-7 of the correction.
 */
const CORRECTION_LEAK_OHM = 1e7;

/**
 * The shared slow loops of model section 4.4, one unknown u each: the node u_<net>, whose equation
 * is that the weighted mean at the sense points equals the net's volts, with walls at +-rangeV.
 */
export function senseLines(
	floorplan: Floorplan,
	network: Network,
	names: readonly string[],
	start: DeckStart | null
): { lines: string[]; correctionNode: Map<string, string> } {
	const ids = safeIds(floorplan.nets);
	const correctionNode = new Map<string, string>();
	const lines = senseProbes(floorplan, network).flatMap(({ net, node, weight, rangeV }) => {
		const { id, volts } = network.nets[net];
		const isQuiet = floorplan.nets[net].groundReference === 'quiet';
		const u = `u_${ids[net]}`;
		correctionNode.set(id, u);
		const mean = Array.from(node, (sensed, p) => {
			const ground = isQuiet ? '0' : nameOf(names, network.nodes.localGround[sensed]);
			return `${weight[p]}*${voltageOf(names[sensed], ground)}`;
		}).join('+');
		const error = `(${volts})-(${mean})`;
		const law = `${error}-${beyond(`v(${u})-${rangeV}`)}+${beyond(`-${rangeV}-v(${u})`)}`;
		const answer = start?.sense.find((candidate) => candidate.net === net);
		const atEnd =
			answer?.state === 'at-range'
				? `${error}-${WALL}*(v(${u})-(${Math.sign(answer.correctionV) * rangeV}))`
				: null;
		return [
			`* shared slow loop of net ${id}: v(${u}) is added to every set point`,
			`ru_${ids[net]} ${u} 0 ${CORRECTION_LEAK_OHM}`,
			`bu_${ids[net]} 0 ${u} i=${startingFrom(`v(${u})`, atEnd, law)}`
		];
	});
	return { lines, correctionNode };
}
