import type { Floorplan } from '#lib/floorplan/index.ts';
import { NM_PER_UM } from '#lib/floorplan/index.ts';
import { findComponents, type Components } from './components.ts';
import { findCrossings } from './crossings.ts';
import { attachLoads } from './loads.ts';
import type { MeshResult, ModelProblem } from './network.ts';
import { buildNodes, numberNodes, type Numbering } from './nodes.ts';
import { checkOverlaps } from './overlaps.ts';
import { indexPlan, type PlanIndex } from './plan-index.ts';
import { placePoints, pointAt, type Points } from './points.ts';
import { buildResistors } from './resistors.ts';
import { drawRuns, type Runs } from './runs.ts';
import { findTaps, type TapList, type Taps } from './taps.ts';

/** Input and ground pins of enabled regulators that join a part without a source. */
function pinProblems(
	{ floorplan, isHorizontal }: PlanIndex,
	runs: Runs,
	{ isSourced }: Components,
	taps: Taps
): ModelProblem[] {
	return floorplan.regulators.flatMap((regulator, r) => {
		if (!regulator.enabled) return [];
		const pins = [
			['output', taps.outputs],
			['input', taps.inputs],
			['ground', taps.grounds]
		] as const;
		return pins.flatMap(([pin, list]): ModelProblem[] => {
			const run = list.run[r];
			if (run < 0 || isSourced[run] === 1) return [];
			const net = floorplan.nets[runs.net[run]];
			const along = list.alongNm[r] / NM_PER_UM;
			const across = runs.coordinateNm[run] / NM_PER_UM;
			const atUm = isHorizontal[runs.layer[run]]
				? ([along, across] as const)
				: ([across, along] as const);
			const source = net.kind === 'regulated' ? 'enabled regulator' : 'feed';
			return [
				{
					path: `regulators (${regulator.id})`,
					message:
						`its ${pin} pin joins a part of net ${net.id} that has no ${source}, at ` +
						`${atUm.join(', ')} um (expected straps or vias that join this part to one)`,
					subject: regulator.id,
					atUm
				}
			];
		});
	});
}

/** Nodes of taps; -1 where there is no tap or its part is left out. */
function tapNodes(
	{ run, alongNm }: TapList,
	points: Points,
	{ isSourced }: Components,
	{ shift }: Numbering
): Int32Array {
	return run.map((r, t) =>
		r < 0 || isSourced[r] === 0 ? -1 : pointAt(points, r, alongNm[t]) + shift[r]
	);
}

/**
 * The resistor network of a floorplan (model section 3): a pure function of the document. Refused
 * where a load or an enabled regulator stands on a part of a net that no source reaches, or where
 * the plan is too large; everything else that is odd is a warning.
 */
export function meshFloorplan(floorplan: Floorplan): MeshResult {
	const plan = indexPlan(floorplan);
	const drawn = drawRuns(plan);
	if (drawn.status === 'refused') return drawn;
	const { runs } = drawn;
	const found = findCrossings(plan, runs);
	if (found.status === 'refused') return found;
	const { crossings } = found;
	const taps = findTaps(plan, runs);
	const placed = placePoints(plan, runs, crossings, taps);
	if (placed.status === 'refused') return placed;
	const { points } = placed;
	const components = findComponents(plan, runs, crossings, taps);
	const numbering = numberNodes(plan, runs, points, components);
	const attached = attachLoads(plan, runs, points, components, numbering);
	const problems = [
		...taps.problems,
		...pinProblems(plan, runs, components, taps),
		...attached.problems
	];
	if (problems.length > 0) return { status: 'refused', problems };

	const nodes = buildNodes(plan, runs, points, components, numbering);
	const { loads } = attached;
	const { warnings, shorts } = checkOverlaps(plan, runs);
	return {
		status: 'meshed',
		network: {
			nets: numbering.nets,
			nodes,
			resistors: buildResistors(plan, runs, crossings, points, components, numbering),
			feeds: {
				node: tapNodes(taps.feeds, points, components, numbering),
				seriesOhm: Float64Array.from(floorplan.feeds, (feed) => feed.seriesOhm)
			},
			regulators: {
				outputNode: tapNodes(taps.outputs, points, components, numbering),
				inputNode: tapNodes(taps.inputs, points, components, numbering),
				groundNode: tapNodes(taps.grounds, points, components, numbering)
			},
			loads: { ...loads, groundNode: loads.node.map((node) => nodes.localGround[node]) },
			shorts,
			leftOutNodes: numbering.leftOutNodes,
			warnings: [...drawn.warnings, ...warnings, ...taps.warnings, ...attached.warnings]
		}
	};
}
