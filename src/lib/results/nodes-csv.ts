import { NM_PER_UM, type Floorplan } from '#lib/floorplan/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';

/** Every node of every net with its voltage, ordered by net, layer, y, x; full double precision. */
export function nodesCsv(floorplan: Floorplan, network: Network, point: OperatingPoint): string {
	const { nodes, nets } = network;
	const order = Array.from({ length: nodes.count }, (_, node) => node).sort(
		(a, b) =>
			nodes.net[a] - nodes.net[b] ||
			nodes.layer[a] - nodes.layer[b] ||
			nodes.yNm[a] - nodes.yNm[b] ||
			nodes.xNm[a] - nodes.xNm[b]
	);
	const lines = ['net,layer,xUm,yUm,volts'];
	for (const node of order) {
		lines.push(
			[
				nets[nodes.net[node]].id,
				floorplan.layers[nodes.layer[node]].id,
				nodes.xNm[node] / NM_PER_UM,
				nodes.yNm[node] / NM_PER_UM,
				point.voltage[node]
			].join(',')
		);
	}
	return `${lines.join('\n')}\n`;
}
