/** Runs the product's own mesh and solver on a plan, for tests that look at voltages and currents. */
import type { Floorplan } from '#lib/floorplan/index.ts';
import { meshFloorplan, type Network } from '#lib/mesh/index.ts';
import { buildResult, type ResultFile } from '#lib/results/index.ts';
import {
	createGridCache,
	solveOperatingPoint,
	type GridCache,
	type OperatingPoint,
	type SolveOutcome
} from '#lib/solver/index.ts';

/** A clock that stands still: tests look at no times. */
function noClock(): number {
	return 0;
}

/** The network of a plan that is expected to mesh. */
export function meshOf(floorplan: Floorplan): Network {
	const meshed = meshFloorplan(floorplan);
	if (meshed.status === 'meshed') return meshed.network;
	throw new Error(meshed.problems.map(({ path, message }) => `${path}: ${message}`).join('\n'));
}

interface Conditions {
	readonly mode?: string;
	readonly corner?: string;
	readonly cache?: GridCache;
}

export function outcomeOf(
	floorplan: Floorplan,
	network: Network,
	conditions: Conditions = {}
): SolveOutcome {
	return solveOperatingPoint(floorplan, network, { ...conditions, now: noClock });
}

/** A solved plan with ways to read it. */
export interface Solved {
	readonly floorplan: Floorplan;
	readonly network: Network;
	readonly point: OperatingPoint;
	readonly result: ResultFile;
	/** Voltage of the node nearest to a place on a net's layer (default: its lowest). */
	voltageAt(net: string, xUm: number, yUm: number, layer?: string): number;
	/** Current of a regulator, A. */
	ampsOf(regulator: string): number;
	stateOf(regulator: string): string;
}

function nodeAt(
	floorplan: Floorplan,
	network: Network,
	netId: string,
	xUm: number,
	yUm: number,
	layerId?: string
): number {
	const net = network.nets.findIndex(({ id }) => id === netId);
	const { firstNode, nodeCount, lowestLayer } = network.nets[net];
	const layer =
		layerId === undefined ? lowestLayer : floorplan.layers.findIndex(({ id }) => id === layerId);
	let best = -1;
	let distance = Infinity;
	for (let node = firstNode; node < firstNode + nodeCount; node++) {
		if (network.nodes.layer[node] !== layer) continue;
		const dx = network.nodes.xNm[node] - 1000 * xUm;
		const dy = network.nodes.yNm[node] - 1000 * yUm;
		if (Math.hypot(dx, dy) < distance) [best, distance] = [node, Math.hypot(dx, dy)];
	}
	if (best < 0) throw new Error(`net ${netId} has no node on that layer`);
	return best;
}

/** Ways to read one operating point of a plan. */
export function readingOf(floorplan: Floorplan, network: Network, point: OperatingPoint): Solved {
	const regulator = (id: string) => floorplan.regulators.findIndex((unit) => unit.id === id);
	return {
		floorplan,
		network,
		point,
		result: buildResult(floorplan, network, point, {
			sha256: '',
			meshSeconds: 0,
			totalSeconds: 0
		}),
		voltageAt: (net, xUm, yUm, layer) =>
			point.voltage[nodeAt(floorplan, network, net, xUm, yUm, layer)],
		ampsOf: (id) => point.regulatorAmps[regulator(id)],
		stateOf: (id) => point.regulatorStates[regulator(id)]
	};
}

/** Meshes and solves a plan that is expected to have an operating point. */
export function solved(floorplan: Floorplan, conditions: Conditions = {}): Solved {
	const network = meshOf(floorplan);
	const outcome = outcomeOf(floorplan, network, conditions);
	if (outcome.status !== 'solved') {
		throw new Error(`not solved: ${JSON.stringify(outcome)}`);
	}
	return readingOf(floorplan, network, outcome.point);
}

/** Solves every mode of a plan on one factor; the readings by mode id. */
export function solvedModes(floorplan: Floorplan): Map<string, Solved> {
	const network = meshOf(floorplan);
	const cache = createGridCache(network);
	return new Map(
		floorplan.modes.map(({ id }) => {
			const outcome = outcomeOf(floorplan, network, { mode: id, cache });
			if (outcome.status !== 'solved') throw new Error(`${id}: ${JSON.stringify(outcome)}`);
			return [id, readingOf(floorplan, network, outcome.point)];
		})
	);
}

/**
 * The value that a quantity takes without via resistance: a lattice of straps has a via at every
 * crossing, so it is read at three small resistances h, 2h and 3h and continued to none by the
 * parabola through them (3 f(h) - 3 f(2h) + f(3h), off by a multiple of h^3).
 */
export function withoutVias(valueAt: (viaOhm: number) => number, viaOhm = 1e-4): number {
	return 3 * valueAt(viaOhm) - 3 * valueAt(2 * viaOhm) + valueAt(3 * viaOhm);
}
