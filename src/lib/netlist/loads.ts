import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import { voltageOf } from './regulators.ts';

/** Below this fraction of nominal a load's law is continued linearly to zero (model section 4.3). */
const COLLAPSE_FRACTION = 0.1;

/** The factor (v / volts)^exponent as an expression of x = v / volts. */
function power(x: string, exponent: number): string {
	if (exponent === 0) return '1';
	if (exponent === 1) return x;
	if (exponent === -1) return `1/(${x})`;
	return `pow(${x},${exponent})`;
}

/** Every attachment of a block's current as a behavioural current source to its local ground. */
export function loadLines(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	corner: Corner,
	names: readonly string[]
): string[] {
	const { loads, nets, nodes } = network;
	const lines: string[] = [];
	let lastBlock = -1;
	for (let load = 0; load < loads.count; load++) {
		const block = floorplan.blocks[loads.block[load]];
		const amps = (block.amps[mode.id] ?? 0) * corner.loadScale * loads.share[load];
		if (amps === 0) continue;
		if (loads.block[load] !== lastBlock) {
			lastBlock = loads.block[load];
			lines.push(`* block ${block.id}, voltage exponent ${block.voltageExponent}`);
		}
		const node = loads.node[load];
		const { volts } = nets[nodes.net[node]];
		const ground = loads.groundNode[load] < 0 ? '0' : names[loads.groundNode[load]];
		const x = `${voltageOf(names[node], ground)}/(${volts})`;
		const slope = Math.pow(COLLAPSE_FRACTION, block.voltageExponent - 1);
		lines.push(
			`bl${load} ${names[node]} ${ground} ` +
				`i=(${amps})*(${x}<${COLLAPSE_FRACTION}?${slope}*${x}:${power(x, block.voltageExponent)})`
		);
	}
	return lines;
}
