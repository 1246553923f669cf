import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { voltageOf } from './regulators.ts';

/** Below this fraction of nominal a load's law is continued linearly to zero (model section 4.3). */
const COLLAPSE_FRACTION = 0.1;

/**
 * Nodes up to which constant-current loads carry their law below a tenth of nominal. Such a load
 * follows the voltage between its rail and its ground, which couples two grids at every load: on a
 * large network a general simulator's factor then grows from seconds to hours, for a law that
 * applies only to blocks that have collapsed.
 */
export const MAX_NODES_WITH_COLLAPSE = 5000;

/**
 * The current over its nominal as an expression of x = v / volts (model section 4.3). A law that
 * rises as the voltage falls has a collapsed answer too, which a simulator would find first, since
 * it starts from 0 V: for x = 0 exactly such a load is given its nominal current.
 */
function lawOf(x: string, exponent: number): string {
	const slope = Math.pow(COLLAPSE_FRACTION, exponent - 1);
	const power = exponent === 0 ? '1' : `pow(${x},${exponent})`;
	const law = `(${x}<${COLLAPSE_FRACTION}?${slope}*${x}:${power})`;
	return exponent < 0 ? `(${x}==0?1:${law})` : law;
}

/** Every attachment of a block's current as a source to its local ground. */
export function loadLines(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	corner: Corner,
	names: readonly string[]
): string[] {
	const { loads, nets, nodes } = network;
	const hasCollapse = nodes.count <= MAX_NODES_WITH_COLLAPSE;
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
		const ground = loads.groundNode[load] < 0 ? '0' : names[loads.groundNode[load]];
		const pair = `${names[node]} ${ground}`;
		if (exponent === 1) {
			lines.push(`gl${load} ${pair} ${pair} ${amps / volts}`);
		} else if (exponent === 0 && !hasCollapse) {
			lines.push(`il${load} ${pair} ${amps}`);
		} else {
			const x = `${voltageOf(names[node], ground)}/(${volts})`;
			lines.push(`bl${load} ${pair} i=(${amps})*${lawOf(x, exponent)}`);
		}
	}
	return lines;
}
