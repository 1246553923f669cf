import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { nameOf, startingFrom, voltageOf } from './expressions.ts';
import { SMALL_NETWORK_NODES } from './size.ts';
import type { DeckStart } from './start.ts';

/** Below this fraction of nominal a load's law is continued linearly to zero (model section 4.3). */
const COLLAPSE_FRACTION = 0.1;

/** The current over its nominal as an expression of x = v / volts (model section 4.3). */
function lawOf(x: string, exponent: number): string {
	const slope = Math.pow(COLLAPSE_FRACTION, exponent - 1);
	const power = exponent === 0 ? '1' : `pow(${x},${exponent})`;
	return `${x}<${COLLAPSE_FRACTION}?${slope}*${x}:${power}`;
}

/**
 * Every attachment of a block's current as a source to its local ground. A simulator starts from
 * 0 V, where it would take the collapsed part for the law: it could find the collapsed answer of a
 * load that draws more as its voltage falls, and would order its equations for a network that the
 * loads tie to ground. A load therefore starts with its nominal current, or that of `start`.
 */
export function loadLines(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	corner: Corner,
	names: readonly string[],
	start: DeckStart | null
): string[] {
	const { loads, nets, nodes } = network;
	const hasCollapse = nodes.count <= SMALL_NETWORK_NODES;
	const lines = hasCollapse
		? []
		: ['* Constant currents are drawn as such also below a tenth of nominal volts.'];
	let lastBlock = -1;
	for (let load = 0; load < loads.count; load++) {
		const block = floorplan.blocks[loads.block[load]];
		const exponent = block.voltageExponent;
		const amps = (block.amps[mode.id] ?? 0) * corner.loadScale * loads.share[load];
		if (amps === 0) continue;
		if (loads.block[load] !== lastBlock) {
			lastBlock = loads.block[load];
			lines.push(`* block ${block.id}, voltage exponent ${exponent}`);
		}
		const node = loads.node[load];
		const { volts } = nets[nodes.net[node]];
		const ground = nameOf(names, loads.groundNode[load]);
		const pair = `${names[node]} ${ground}`;
		if (exponent === 1) {
			lines.push(`gl${load} ${pair} ${pair} ${amps / volts}`);
		} else if (exponent === 0 && !hasCollapse) {
			lines.push(`il${load} ${pair} ${amps}`);
		} else {
			const x = `${voltageOf(names[node], ground)}/(${volts})`;
			const first = start === null ? '1' : String(start.loadAmps[load] / amps);
			lines.push(`bl${load} ${pair} i=(${amps})*${startingFrom(x, first, lawOf(x, exponent))}`);
		}
	}
	return lines;
}
