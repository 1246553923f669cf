import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';
import { senseProbes, type Network } from '#lib/mesh/index.ts';
import { gather } from './gather.ts';

/** The regulators that are enabled, in flat arrays; `unit` leads back to the floorplan. */
export interface CircuitRegulators {
	readonly count: number;
	/** Index into `floorplan.regulators`. */
	readonly unit: Int32Array;
	/** Index of the output net. */
	readonly net: Int32Array;
	readonly outputNode: Int32Array;
	/** -1 for an ideal input. */
	readonly inputNode: Int32Array;
	/** Node into which the quiescent current returns, -1 for an ideal ground. */
	readonly groundNode: Int32Array;
	/** Node that the set point refers to, -1 for a quiet or an ideal ground. */
	readonly referenceNode: Int32Array;
	/** Index into `Circuit.senses`, -1 where the net has no loop. */
	readonly sense: Int32Array;
	/** Net volts + offset, V, before the shared correction. */
	readonly setV: Float64Array;
	/** outputOhm of the cell times the corner's scale. */
	readonly outputOhm: Float64Array;
	readonly onOhm: Float64Array;
	readonly maxA: Float64Array;
	readonly sinkA: Float64Array;
	readonly quiescentA: Float64Array;
}

/** One entry per attachment of `network.loads`. */
export interface CircuitLoads {
	readonly count: number;
	readonly node: Int32Array;
	/** -1 for an ideal ground. */
	readonly groundNode: Int32Array;
	readonly block: Int32Array;
	/** Current at nominal volts in this mode and corner, A. */
	readonly nominalA: Float64Array;
	/** Nominal volts of the load's net. */
	readonly volts: Float64Array;
	readonly exponent: Float64Array;
}

/** Feeds that have a node, in the order of the floorplan. */
export interface CircuitFeeds {
	readonly count: number;
	/** Index into `floorplan.feeds`. */
	readonly feed: Int32Array;
	readonly node: Int32Array;
	/** The source's volts. */
	readonly volts: Float64Array;
	/** 0 holds the node at the source's volts. */
	readonly seriesOhm: Float64Array;
}

export interface CircuitSense {
	/** Index into `network.nets`. */
	readonly net: number;
	readonly volts: number;
	readonly rangeV: number;
	readonly node: Int32Array;
	/** Ground node that each measured voltage is taken against, -1 for an ideal or quiet ground. */
	readonly groundNode: Int32Array;
	/** Sums to 1. */
	readonly weight: Float64Array;
}

/** A network in one mode and corner: everything the equations need, as numbers. */
export interface Circuit {
	readonly network: Network;
	readonly mode: Mode;
	readonly corner: Corner;
	/** Per resistor, ohm. */
	readonly ohm: Float64Array;
	/** Per net: the volts that drops are counted from. */
	readonly nominalV: Float64Array;
	readonly regulators: CircuitRegulators;
	readonly loads: CircuitLoads;
	readonly feeds: CircuitFeeds;
	readonly senses: readonly CircuitSense[];
	/** Nodes held at a source's volts: 1 where held. Length of the nodes. */
	readonly held: Uint8Array;
}

/** A feed without series resistance ties its node to the source; such nodes are not unknowns. */
export function heldNodes(network: Network): Uint8Array {
	const held = new Uint8Array(network.nodes.count);
	network.feeds.node.forEach((node, feed) => {
		if (node >= 0 && network.feeds.seriesOhm[feed] === 0) held[node] = 1;
	});
	return held;
}

/** Volts of each net in a mode: nominal, or for an input net what the mode says. */
function nominalVolts(network: Network, mode: Mode): Float64Array {
	return Float64Array.from(network.nets, (net) =>
		net.kind === 'input' ? (mode.inputVolts?.[net.id] ?? net.volts) : net.volts
	);
}

function circuitRegulators(
	floorplan: Floorplan,
	network: Network,
	corner: Corner,
	senses: readonly CircuitSense[]
): CircuitRegulators {
	const netIndex = new Map(network.nets.map((net, index) => [net.id, index]));
	const nets = new Map(floorplan.nets.map((net) => [net.id, net]));
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	const senseOf = new Map(senses.map((sense, index) => [sense.net, index]));
	const taps = network.regulators;
	const units = floorplan.regulators.flatMap((unit, index) => {
		const cell = cells.get(unit.cell);
		const net = nets.get(unit.output);
		if (!unit.enabled || cell === undefined || net === undefined) return [];
		return taps.outputNode[index] < 0 ? [] : [{ unit, index, cell, net }];
	});
	const outputNet = (unit: (typeof units)[number]) => netIndex.get(unit.net.id) ?? -1;
	return {
		count: units.length,
		unit: Int32Array.from(units, ({ index }) => index),
		net: Int32Array.from(units, outputNet),
		outputNode: Int32Array.from(units, ({ index }) => taps.outputNode[index]),
		inputNode: Int32Array.from(units, ({ index }) => taps.inputNode[index]),
		groundNode: Int32Array.from(units, ({ index }) => taps.groundNode[index]),
		referenceNode: Int32Array.from(units, ({ index, net }) =>
			net.groundReference === 'quiet' ? -1 : taps.groundNode[index]
		),
		sense: Int32Array.from(units, (unit) => senseOf.get(outputNet(unit)) ?? -1),
		setV: Float64Array.from(units, ({ unit, net }) => net.volts + unit.offsetV),
		outputOhm: Float64Array.from(units, ({ cell }) => cell.outputOhm * corner.outputOhmScale),
		onOhm: Float64Array.from(units, ({ cell }) => cell.onOhm),
		maxA: Float64Array.from(units, ({ cell }) => cell.maxA),
		sinkA: Float64Array.from(units, ({ cell }) => cell.sinkA),
		quiescentA: Float64Array.from(units, ({ cell }) => cell.quiescentA)
	};
}

function circuitLoads(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	corner: Corner
): CircuitLoads {
	const { loads, nets, nodes } = network;
	const amps = Float64Array.from(
		floorplan.blocks,
		(block) => (block.amps[mode.id] ?? 0) * corner.loadScale
	);
	const netVolts = nets.map(({ volts }) => volts);
	const exponents = floorplan.blocks.map(({ voltageExponent }) => voltageExponent);
	return {
		count: loads.count,
		node: loads.node,
		groundNode: loads.groundNode,
		block: loads.block,
		nominalA: loads.share.map((share, load) => share * amps[loads.block[load]]),
		volts: gather(
			netVolts,
			loads.node.map((node) => nodes.net[node])
		),
		exponent: gather(exponents, loads.block)
	};
}

function circuitFeeds(network: Network, nominalV: Float64Array): CircuitFeeds {
	const used: number[] = [];
	network.feeds.node.forEach((node, feed) => {
		if (node >= 0) used.push(feed);
	});
	return {
		count: used.length,
		feed: Int32Array.from(used),
		node: Int32Array.from(used, (feed) => network.feeds.node[feed]),
		volts: Float64Array.from(used, (feed) => {
			const net = network.nodes.net[network.feeds.node[feed]];
			return network.nets[net].kind === 'ground' ? 0 : nominalV[net];
		}),
		seriesOhm: Float64Array.from(used, (feed) => network.feeds.seriesOhm[feed])
	};
}

function circuitSenses(floorplan: Floorplan, network: Network): CircuitSense[] {
	return senseProbes(floorplan, network).map((probe) => {
		const { id, volts } = network.nets[probe.net];
		const quiet = floorplan.nets.find((net) => net.id === id)?.groundReference === 'quiet';
		return {
			net: probe.net,
			volts,
			rangeV: probe.rangeV,
			node: probe.node,
			groundNode: probe.node.map((node) => (quiet ? -1 : network.nodes.localGround[node])),
			weight: probe.weight
		};
	});
}

/**
 * The numbers of one mode and corner.
 * @param ohm resistances of the corner, in the order of `network.resistors`
 */
export function buildCircuit(
	floorplan: Floorplan,
	network: Network,
	mode: Mode,
	corner: Corner,
	ohm: Float64Array
): Circuit {
	const nominalV = nominalVolts(network, mode);
	const senses = circuitSenses(floorplan, network);
	return {
		network,
		mode,
		corner,
		ohm,
		nominalV,
		regulators: circuitRegulators(floorplan, network, corner, senses),
		loads: circuitLoads(floorplan, network, mode, corner),
		feeds: circuitFeeds(network, nominalV),
		senses,
		held: heldNodes(network)
	};
}
