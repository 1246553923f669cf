import type { Corner, Floorplan } from '#lib/floorplan/index.ts';
import { boundsOf } from '#lib/geometry/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import { listFindings } from './findings.ts';
import { metalLoads } from './metal-load.ts';
import { blockResults, feedResults, regulatorResults } from './ledger.ts';
import { blockAt, dropAt, lowestLayerNodes, nodePositionUm } from './readings.ts';
import {
	RESULT_FORMAT,
	RESULT_VERSION,
	type BlockResult,
	type NetResult,
	type PowerResult,
	type RegulatorResult,
	type ResultFile
} from './schema.ts';
import { worstSpots } from './spots.ts';

/** Entries of the lists of worst straps and vias. */
const WORST_COUNT = 20;
/** Default distance between worst spots, as a part of the die's longer side. */
const SPOT_SPACING = 0.05;

export interface ResultContext {
	/** sha256 of the document's canonical form. */
	readonly sha256: string;
	readonly meshSeconds: number;
	readonly totalSeconds: number;
	/** Peak memory of the process, MB, where it is known. */
	readonly peakMb?: number;
	/** Least distance between two worst spots, um; default: a twentieth of the die's longer side. */
	readonly spotSpacingUm?: number;
}

/** Currents of the enabled regulators of a net: (largest - smallest) / mean, or null. */
function sharingSpread(
	floorplan: Floorplan,
	regulators: readonly RegulatorResult[],
	net: string
): number | null {
	const amps = floorplan.regulators.flatMap((unit, index) =>
		unit.output === net && unit.enabled ? [regulators[index].amps] : []
	);
	if (amps.length === 0) return null;
	const mean = amps.reduce((sum, value) => sum + value, 0) / amps.length;
	if (mean === 0) return null;
	return (Math.max(...amps) - Math.min(...amps)) / Math.abs(mean);
}

function netResults(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint,
	regulators: readonly RegulatorResult[],
	blocks: readonly BlockResult[]
): NetResult[] {
	return network.nets.flatMap((net, index): NetResult[] => {
		if (net.nodeCount === 0) return [];
		const nominalV = point.nominalV[index];
		let minV = Infinity;
		let maxV = -Infinity;
		for (let node = net.firstNode; node < net.firstNode + net.nodeCount; node++) {
			minV = Math.min(minV, point.voltage[node]);
			maxV = Math.max(maxV, point.voltage[node]);
		}
		// On the ground net the figure of merit is the rise above 0 V, not a drop below it.
		const severity = (node: number) =>
			net.kind === 'ground' ? point.voltage[node] : dropAt(network, point, node).dropV;
		let worst = -1;
		let least = -1;
		for (const node of lowestLayerNodes(network, index)) {
			if (worst < 0 || severity(node) > severity(worst)) worst = node;
			if (least < 0 || severity(node) < severity(least)) least = node;
		}
		const [xUm, yUm] = nodePositionUm(network, worst);
		const reading = dropAt(network, point, worst);
		const sense = point.sense.find((answer) => answer.net === index);
		const ground = net.kind === 'ground';
		return [
			{
				id: net.id,
				kind: net.kind,
				nominalV,
				minV,
				maxV,
				worstDropV: severity(worst),
				netDropV: ground ? 0 : reading.netDropV,
				groundRiseV: ground ? point.voltage[worst] : reading.groundRiseV,
				worstRiseV: ground ? Math.max(0, severity(worst)) : Math.max(0, -severity(least)),
				worst: {
					xUm,
					yUm,
					layer: floorplan.layers[network.nodes.layer[worst]].id,
					block: blockAt(floorplan, net.id, xUm, yUm)
				},
				loadA: blocks.reduce((sum, block) => (block.net === net.id ? sum + block.amps : sum), 0),
				sharingSpread: sharingSpread(floorplan, regulators, net.id),
				...(sense === undefined ? {} : { senseU: sense.correctionV, senseState: sense.state })
			}
		];
	});
}

function powerResult(network: Network, point: OperatingPoint): PowerResult {
	const nets = network.nets.map((net, index) => ({ id: net.id, ...point.power[index] }));
	const total = (part: 'loadW' | 'regulatorW' | 'gridW' | 'feedW') =>
		nets.reduce((sum, net) => sum + net[part], 0);
	const loadW = total('loadW');
	return {
		loadW,
		regulatorW: total('regulatorW'),
		gridW: total('gridW'),
		feedW: total('feedW'),
		inputW: point.sourceW,
		efficiency: point.sourceW > 0 ? loadW / point.sourceW : null,
		nets
	};
}

function cornerOf(floorplan: Floorplan, point: OperatingPoint): Corner {
	const corner = floorplan.corners.find(({ id }) => id === point.corner);
	if (corner === undefined)
		throw new RangeError(`there is no corner "${point.corner}" in the plan`);
	return corner;
}

/** The result file of an operating point. */
export function buildResult(
	floorplan: Floorplan,
	network: Network,
	point: OperatingPoint,
	context: ResultContext
): ResultFile {
	const regulators = regulatorResults(floorplan, network, point);
	const blocks = blockResults(floorplan, network, point);
	const feeds = feedResults(floorplan, point);
	const nets = netResults(floorplan, network, point, regulators, blocks);
	const metal = metalLoads(floorplan, network, point, cornerOf(floorplan, point));
	const { minX, maxX, minY, maxY } = boundsOf(floorplan.die.outline);
	const apartUm = context.spotSpacingUm ?? SPOT_SPACING * Math.max(maxX - minX, maxY - minY);
	const { statistics } = point;
	return {
		format: RESULT_FORMAT,
		version: RESULT_VERSION,
		floorplan: { name: floorplan.name ?? null, sha256: context.sha256 },
		mode: point.mode,
		corner: point.corner,
		solver: {
			nodes: network.nodes.count,
			resistors: network.resistors.count,
			method: statistics.method,
			newtonSteps: statistics.newtonSteps,
			iterations: statistics.iterations,
			residual: statistics.residual,
			seconds: {
				mesh: context.meshSeconds,
				setup: statistics.setupSeconds,
				solve: statistics.solveSeconds,
				total: context.totalSeconds
			},
			peakMb: context.peakMb ?? null
		},
		proof: { ...point.proof },
		nets,
		spots: network.nets.flatMap((net, index) =>
			net.kind === 'ground' || net.nodeCount === 0
				? []
				: worstSpots(floorplan, network, point, index, apartUm)
		),
		regulators,
		blocks,
		feeds,
		straps: { worst: metal.straps.slice(0, WORST_COUNT) },
		vias: { worst: metal.vias.slice(0, WORST_COUNT) },
		power: powerResult(network, point),
		findings: listFindings({ floorplan, network, point, nets, blocks, regulators, feeds, metal }),
		warnings: point.warnings.map(({ code, message, subject, atUm }) => ({
			code,
			message,
			...(subject === undefined ? {} : { subject }),
			...(atUm === undefined ? {} : { atUm: [atUm[0], atUm[1]] as [number, number] })
		}))
	};
}
