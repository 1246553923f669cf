import type { Cell, Corner, Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { beyond, nameOf, startingFrom, WALL } from './expressions.ts';
import { safeIds } from './names.ts';
import type { DeckStart } from './start.ts';

/**
 * Slope of a unit's line in the first step, ohm: steep enough that rounding of voltages does not
 * move its current across a bound.
 */
const START_OHM = 1000;

/** A unit at a known operating point: v_in - v, and s against 0 V. */
interface UnitAt {
	readonly acrossV: number;
	readonly setV: number;
	/** Input against 0 V, or null where it is ideal. */
	readonly inV: number | null;
	readonly amps: number;
}

/**
 * The current at which the characteristic of the deck, steep walls included, has the voltage of an
 * operating point: a hair beyond the bound for a unit that stands on one.
 */
function currentOnWalls(cell: Cell, ohm: number, { acrossV, setV, inV, amps }: UnitAt): number {
	const within = (current: number) => {
		const regulating = (inV ?? 0) - (setV - ohm * current);
		return inV === null ? regulating : Math.max(regulating, cell.onOhm * Math.max(current, 0));
	};
	const beyondMaxV = acrossV - within(cell.maxA);
	if (beyondMaxV > 0) return cell.maxA + beyondMaxV / WALL;
	const isStarved = inV !== null && acrossV < 0 && inV - setV < acrossV;
	if (isStarved) return acrossV / WALL;
	const lowerV = (inV ?? 0) - (setV + ohm * cell.sinkA);
	return acrossV < lowerV ? -cell.sinkA + (acrossV - lowerV) / WALL : amps;
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
	correctionNode: ReadonlyMap<string, string>,
	start: DeckStart | null
): string[] {
	const ids = safeIds(floorplan.regulators);
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	const nets = new Map(floorplan.nets.map((net) => [net.id, net]));
	const taps = network.regulators;

	/**
	 * A straight line through the unit's place at the start: all these lines together have the start
	 * as their solution, whatever pieces the units stand on.
	 */
	function firstLine(
		r: number,
		cell: Cell,
		ohm: number,
		setV: number,
		referenceNode: number
	): string | null {
		if (start === null) return null;
		const at = (node: number) => (node < 0 ? 0 : start.voltage[node]);
		const net = network.nodes.net[taps.outputNode[r]];
		const loop = start.sense.find((candidate) => candidate.net === net);
		const inV = floorplan.regulators[r].input === null ? null : at(taps.inputNode[r]);
		const acrossV = (inV ?? 0) - at(taps.outputNode[r]);
		const amps = currentOnWalls(cell, ohm, {
			acrossV,
			setV: setV + (loop?.correctionV ?? 0) + at(referenceNode),
			inV,
			amps: start.regulatorAmps[r]
		});
		return `(${acrossV})+${START_OHM}*(i(vr_${ids[r]})-(${amps}))`;
	}

	return floorplan.regulators.flatMap((unit, r) => {
		const cell = cells.get(unit.cell);
		const net = nets.get(unit.output);
		if (!unit.enabled || cell === undefined || net === undefined || taps.outputNode[r] < 0) {
			return [`* regulator ${unit.id}: off`];
		}
		const output = nameOf(names, taps.outputNode[r]);
		const input = nameOf(names, taps.inputNode[r]);
		const ground = nameOf(names, taps.groundNode[r]);
		const referenceNode = net.groundReference === 'quiet' ? -1 : taps.groundNode[r];
		const correction = correctionNode.get(net.id);
		const ohm = cell.outputOhm * corner.outputOhmScale;
		const current = `i(vr_${ids[r]})`;
		const setV = net.volts + unit.offsetV;

		const level = [
			`(${setV})`,
			...(correction === undefined ? [] : [`v(${correction})`]),
			...(referenceNode < 0 ? [] : [`v(${names[referenceNode]})`])
		].join('+');
		const inputVolts = unit.input === null ? '' : `v(${input})`;
		const regulating = `${inputVolts}-(${level}-${ohm}*${current})`;
		const fullyOn = `${cell.onOhm}*${current}-${beyond(`-${current}`)}`;
		const within = unit.input === null ? regulating : `max(${regulating},${fullyOn})`;
		const bounds = `+${beyond(`${current}-${cell.maxA}`)}-${beyond(`-${cell.sinkA}-${current}`)}`;
		const lines = [
			`* regulator ${unit.id}, cell ${unit.cell}`,
			`vr_${ids[r]} ${input} r_${ids[r]} 0`,
			`br_${ids[r]} r_${ids[r]} ${output} v=${startingFrom(current, firstLine(r, cell, ohm, setV, referenceNode), within + bounds)}`
		];
		if (cell.quiescentA > 0) lines.push(`iq_${ids[r]} ${input} ${ground} ${cell.quiescentA}`);
		return lines;
	});
}
