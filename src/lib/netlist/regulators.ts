import type { Corner, Floorplan } from '#lib/floorplan/index.ts';
import { senseProbes, type Network } from '#lib/mesh/index.ts';
import { safeIds } from './names.ts';

/**
 * Slope of the characteristics beyond a bound, ohm. It stands for a vertical line: a unit that is
 * held 10 mV away from its law passes its bound by 1 nA.
 */
export const WALL_OHM = 1e7;

/**
 * Leak of the node that stands for a slow loop's correction, ohm. Where every unit of the net stands
 * at a bound the correction moves nothing, and without a leak the equations would be singular. Less
 * of it would cost digits where a simulator has ordered its equations in such a state; this much
 * moves the mean by 1e-7 of the correction.
 */
const CORRECTION_LEAK_OHM = 1e7;

/** The voltage of a node against a reference; ideal and quiet ground are node 0. */
export function voltageOf(node: string, reference: string): string {
	return reference === '0' ? `v(${node})` : `v(${node},${reference})`;
}

function nameOf(names: readonly string[], node: number): string {
	return node < 0 ? '0' : names[node];
}

/**
 * The steep wall beyond a bound: 0 within it and on the bound itself. The tie matters, since a
 * simulator starts on it, with no current, and orders its equations by the slopes that it finds.
 */
function beyond(excess: string): string {
	return `${WALL_OHM}*((${excess})>0?(${excess}):0)`;
}

/**
 * Regulators as current-controlled voltage sources between input and output pin, the law of model
 * section 4.2 turned round: with i the current into the output net,
 *
 *   v_in - v = max(v_in - (s - Ro i), Ron i)  within -sinkA <= i <= maxA,
 *
 * and steep walls at the bounds, also below i = 0 of Ron i, because the pass device fully on never
 * takes current back. Written over the current, the first Newton step is that of an unbounded
 * linear unit and no piece is flat, so that a general simulator does not lose its way as it does
 * with clamped current sources, where a net whose units are all clamped floats.
 */
export function regulatorLines(
	floorplan: Floorplan,
	network: Network,
	corner: Corner,
	names: readonly string[],
	correctionNode: ReadonlyMap<string, string>
): string[] {
	const ids = safeIds(floorplan.regulators);
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	const nets = new Map(floorplan.nets.map((net) => [net.id, net]));
	return floorplan.regulators.flatMap((unit, r) => {
		const cell = cells.get(unit.cell);
		const net = nets.get(unit.output);
		const outputNode = network.regulators.outputNode[r];
		if (!unit.enabled || cell === undefined || net === undefined || outputNode < 0) {
			return [`* regulator ${unit.id}: off`];
		}
		const output = nameOf(names, outputNode);
		const input = nameOf(names, network.regulators.inputNode[r]);
		const ground = nameOf(names, network.regulators.groundNode[r]);
		const reference = net.groundReference === 'quiet' ? '0' : ground;
		const correction = correctionNode.get(net.id);
		const ohm = cell.outputOhm * corner.outputOhmScale;
		const current = `i(vr_${ids[r]})`;

		const referred = reference === '0' ? '' : `+v(${reference})`;
		const level = `(${net.volts + unit.offsetV})${correction === undefined ? '' : `+v(${correction})`}${referred}`;
		const below = unit.input === null ? '' : `v(${input})`;
		const regulating = `${below}-(${level}-${ohm}*${current})`;
		const fullyOn = `${cell.onOhm}*${current}-${beyond(`-${current}`)}`;
		const within = unit.input === null ? regulating : `max(${regulating},${fullyOn})`;
		const bounds = `+${beyond(`${current}-${cell.maxA}`)}-${beyond(`-${cell.sinkA}-${current}`)}`;
		const lines = [
			`* regulator ${unit.id}, cell ${unit.cell}`,
			`vr_${ids[r]} ${input} r_${ids[r]} 0`,
			`br_${ids[r]} r_${ids[r]} ${output} v=${within}${bounds}`
		];
		if (cell.quiescentA > 0) lines.push(`iq_${ids[r]} ${input} ${ground} ${cell.quiescentA}`);
		return lines;
	});
}

/**
 * The shared slow loops of model section 4.4, one unknown u each: the node u_<net>, whose equation
 * is that the weighted mean at the sense points equals the net's volts, with walls at +-rangeV.
 */
export function senseLines(
	floorplan: Floorplan,
	network: Network,
	names: readonly string[]
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
		return [
			`* shared slow loop of net ${id}: v(${u}) is added to every set point`,
			`ru_${ids[net]} ${u} 0 ${CORRECTION_LEAK_OHM}`,
			`bu_${ids[net]} 0 ${u} i=(${volts})-(${mean})-${beyond(`v(${u})-${rangeV}`)}+${beyond(`-${rangeV}-v(${u})`)}`
		];
	});
	return { lines, correctionNode };
}
