/** Reads an open resistor netlist (cards R, I, V) into the product's own network types. */
import { gunzipSync } from 'node:zlib';
import { readFileSync } from 'node:fs';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { RESISTOR_SEGMENT, RESISTOR_VIA, type Network } from '#lib/mesh/index.ts';
import { planOf, rectangle } from './plans.ts';

/** Length units of the netlist's node names per nm. */
const UNITS_PER_NM = 2;

export interface OpenNetlist {
	readonly floorplan: Floorplan;
	readonly network: Network;
	/** Name of every node, in the network's order. */
	readonly nodeNames: readonly string[];
	readonly loadCount: number;
	readonly totalLoadA: number;
}

interface Card {
	readonly kind: string;
	readonly from: string;
	readonly to: string;
	readonly value: number;
}

function readCards(path: string): Card[] {
	const text = gunzipSync(readFileSync(path)).toString('ascii');
	return text.split('\n').flatMap((line): Card[] => {
		const [name, from, to, value] = line.trim().split(/\s+/);
		return 'RIV'.includes(name?.[0] ?? '.')
			? [{ kind: name[0], from, to, value: Number(value) }]
			: [];
	});
}

function placeOf(node: string): { layer: number; xNm: number; yNm: number } {
	const match = /^n1_m(\d+)_(\d+)_(\d+)$/.exec(node);
	if (match === null) throw new Error(`"${node}" is not a node of the form n1_m<layer>_<x>_<y>`);
	const [layer, x, y] = match.slice(1).map(Number);
	return { layer, xNm: x / UNITS_PER_NM, yNm: y / UNITS_PER_NM };
}

/** One input net, held at its V cards' nodes, with all I cards as one block of constant current. */
export function readOpenNetlist(path: string): OpenNetlist {
	const cards = readCards(path);
	const resistors = cards.filter(({ kind }) => kind === 'R');
	const loads = cards.filter(({ kind }) => kind === 'I');
	const sources = cards.filter(({ kind }) => kind === 'V');
	const nodeNames = [...new Set(resistors.flatMap(({ from, to }) => [from, to]))].sort();
	const index = new Map(nodeNames.map((name, node) => [name, node]));
	const nodeOf = (name: string) => {
		const node = index.get(name);
		if (node === undefined) throw new Error(`no resistor touches node "${name}"`);
		return node;
	};
	const places = nodeNames.map(placeOf);
	const metals = [...new Set(places.map(({ layer }) => layer))].sort((a, b) => a - b);
	const layer = Uint8Array.from(places, (place) => metals.indexOf(place.layer));
	const totalLoadA = loads.reduce((sum, { value }) => sum + value, 0);
	const from = Int32Array.from(resistors, (card) => nodeOf(card.from));
	const to = Int32Array.from(resistors, (card) => nodeOf(card.to));
	const isVia = Array.from(from, (node, r) => layer[node] !== layer[to[r]]);
	const floorplan = planOf({
		die: { outline: rectangle(0, 0, 1000, 1000) },
		layers: metals.map((metal) => ({ id: `m${metal}`, direction: 'horizontal', sheetOhm: 1 })),
		vias: [{ id: 'v', lower: 'm1', upper: `m${metals[1]}`, ohmPerCut: 1, cutsPerUm2: 0 }],
		nets: [{ id: 'vdd', kind: 'input', volts: sources[0].value }],
		straps: metals.map((metal) => ({
			id: `s${metal}`,
			net: 'vdd',
			layer: `m${metal}`,
			pitchUm: 1000,
			widthUm: 1,
			offsetUm: 0
		})),
		feeds: sources.map(({ from: name }, k) => {
			const { xNm, yNm } = placeOf(name);
			return { id: `v${k}`, net: 'vdd', xUm: xNm / 1000, yUm: yNm / 1000, seriesOhm: 0 };
		}),
		blocks: [
			{
				id: 'loads',
				net: 'vdd',
				outline: rectangle(0, 0, 1000, 1000),
				amps: { default: totalLoadA }
			}
		]
	});
	return {
		floorplan,
		nodeNames,
		loadCount: loads.length,
		totalLoadA,
		network: {
			nets: [
				{
					id: 'vdd',
					kind: 'input',
					volts: sources[0].value,
					firstNode: 0,
					nodeCount: nodeNames.length,
					lowestLayer: 0,
					highestLayer: metals.length - 1
				}
			],
			nodes: {
				count: nodeNames.length,
				xNm: Int32Array.from(places, ({ xNm }) => xNm),
				yNm: Int32Array.from(places, ({ yNm }) => yNm),
				layer,
				net: new Uint16Array(nodeNames.length),
				localGround: new Int32Array(nodeNames.length).fill(-1)
			},
			resistors: {
				count: resistors.length,
				from,
				to,
				nominalOhm: Float64Array.from(resistors, ({ value }) => value),
				kind: Uint8Array.from(isVia, (via) => (via ? RESISTOR_VIA : RESISTOR_SEGMENT)),
				source: Int32Array.from(isVia, (via, r) => (via ? 0 : layer[from[r]])),
				layer: Uint8Array.from(from, (node, r) => Math.min(layer[node], layer[to[r]])),
				cuts: Int32Array.from(isVia, (via) => (via ? 1 : 0))
			},
			feeds: {
				node: Int32Array.from(sources, (card) => nodeOf(card.from)),
				seriesOhm: new Float64Array(sources.length)
			},
			regulators: {
				outputNode: new Int32Array(0),
				inputNode: new Int32Array(0),
				groundNode: new Int32Array(0)
			},
			loads: {
				count: loads.length,
				block: new Int32Array(loads.length),
				node: Int32Array.from(loads, (card) => nodeOf(card.from)),
				groundNode: new Int32Array(loads.length).fill(-1),
				share: Float64Array.from(loads, ({ value }) => value / totalLoadA)
			},
			shorts: [],
			leftOutNodes: 0,
			warnings: []
		}
	};
}
