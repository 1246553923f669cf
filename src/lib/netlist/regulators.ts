import type { Cell, Corner, Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { beyond, nameOf, startingFrom, WALL } from './expressions.ts';
import { safeIds } from './names.ts';
import type { DeckStart } from './start.ts';

/** The straight pieces of a unit's characteristic, each an expression of v_in - v over its current. */
interface Pieces {
	/** v_in - (s - Ro i). */
	readonly regulating: string;
	/** Ron i. */
	readonly fullyOn: string;
	/** Ron i with a wall below 0: the pass device never takes current back. */
	readonly blocked: string;
	/** Walls beyond maxA and below -sinkA. */
	readonly limited: string;
	readonly idle: string;
}

function piecesOf(cell: Cell, current: string, regulating: string): Pieces {
	return {
		regulating,
		fullyOn: `${cell.onOhm}*${current}`,
		blocked: `${cell.onOhm}*${current}+${WALL}*${current}`,
		limited: `+${WALL}*(${current}-${cell.maxA})`,
		idle: `-${WALL}*(-${cell.sinkA}-${current})`
	};
}

/** The pieces on which a unit stands at a known operating point. */
function startOf(
	pieces: Pieces,
	cell: Cell,
	ohm: number,
	at: {
		readonly state: DeckStart['regulatorStates'][number];
		readonly amps: number;
		/** Set point and output against 0 V, and the input, or null where it is ideal. */
		readonly setV: number;
		readonly outV: number;
		readonly inV: number | null;
	}
): string {
	const { state, amps, setV, outV, inV } = at;
	const isStarved = inV !== null && amps <= 0 && inV <= outV && setV > outV;
	const isFullyOn =
		inV !== null && !isStarved && amps > 0 && cell.onOhm * amps > inV - (setV - ohm * amps);
	const within = isStarved ? pieces.blocked : isFullyOn ? pieces.fullyOn : pieces.regulating;
	if (state === 'limited') return within + pieces.limited;
	// A unit that may not sink and gets nothing stands on its lower bound too.
	if (state === 'idle' || (isStarved && cell.sinkA === 0)) return within + pieces.idle;
	return within;
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
		const pieces = piecesOf(cell, current, `${inputVolts}-(${level}-${ohm}*${current})`);
		const within =
			unit.input === null
				? pieces.regulating
				: `max(${pieces.regulating},${pieces.fullyOn}-${beyond(`-${current}`)})`;
		const bounds = `+${beyond(`${current}-${cell.maxA}`)}-${beyond(`-${cell.sinkA}-${current}`)}`;
		const at = (node: number) => (start === null || node < 0 ? 0 : start.voltage[node]);
		const correctionV =
			start?.sense.find((loop) => network.nets[loop.net].id === net.id)?.correctionV ?? 0;
		const startPiece =
			start === null
				? null
				: startOf(pieces, cell, ohm, {
						state: start.regulatorStates[r],
						amps: start.regulatorAmps[r],
						setV: setV + correctionV + at(referenceNode),
						outV: at(taps.outputNode[r]),
						inV: unit.input === null ? null : at(taps.inputNode[r])
					});
		const lines = [
			`* regulator ${unit.id}, cell ${unit.cell}`,
			`vr_${ids[r]} ${input} r_${ids[r]} 0`,
			`br_${ids[r]} r_${ids[r]} ${output} v=${startingFrom(current, startPiece, within + bounds)}`
		];
		if (cell.quiescentA > 0) lines.push(`iq_${ids[r]} ${input} ${ground} ${cell.quiescentA}`);
		return lines;
	});
}
