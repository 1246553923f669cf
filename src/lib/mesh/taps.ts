import { NM_PER_UM, toNm } from '#lib/floorplan/index.ts';
import type { Regulator } from '#lib/floorplan/index.ts';
import { orientPoint } from '#lib/geometry/index.ts';
import { nearestRun } from './nearest-run.ts';
import type { ModelProblem, ModelWarning } from './network.ts';
import { indexOfId, type PlanIndex } from './plan-index.ts';
import type { Runs } from './runs.ts';

/** Where feeds or pins join: one entry per item, run -1 where there is nothing to join. */
export interface TapList {
	readonly run: Int32Array;
	/** Position of the foot point along the run, nm. */
	readonly alongNm: Int32Array;
}

export interface Taps {
	/** In the order of `floorplan.feeds`. */
	readonly feeds: TapList;
	/** In the order of `floorplan.regulators`. */
	readonly outputs: TapList;
	readonly inputs: TapList;
	readonly grounds: TapList;
	readonly warnings: readonly ModelWarning[];
	readonly problems: readonly ModelProblem[];
}

interface PointNm {
	readonly xNm: number;
	readonly yNm: number;
}

function emptyTaps(count: number): TapList {
	return { run: new Int32Array(count).fill(-1), alongNm: new Int32Array(count) };
}

/** The lowest (step 1) or highest (step -1) layer on which the net has runs, or -1. */
export function outermostLayer(
	{ layerCount }: PlanIndex,
	{ groupStart }: Runs,
	net: number,
	step: 1 | -1
): number {
	for (let i = 0; i < layerCount; i++) {
		const layer = step === 1 ? i : layerCount - 1 - i;
		const group = net * layerCount + layer;
		if (groupStart[group + 1] > groupStart[group]) return layer;
	}
	return -1;
}

function atUm({ xNm, yNm }: PointNm): readonly [number, number] {
	return [xNm / NM_PER_UM, yNm / NM_PER_UM];
}

type Pin = 'input' | 'output' | 'ground';

/** Where a pin of a placed regulator stands, nm; the centre of the footprint where none is given. */
function pinPosition({ floorplan }: PlanIndex, regulator: Regulator, pin: Pin): PointNm {
	const cell = floorplan.cells.find((candidate) => candidate.id === regulator.cell);
	if (cell === undefined) throw new Error(`"${regulator.cell}" is not among the parsed cells`);
	const width = toNm(cell.widthUm);
	const height = toNm(cell.heightUm);
	const given = cell.pins?.[pin];
	const [dx, dy] = orientPoint(
		given === undefined ? [width / 2, height / 2] : [toNm(given[0]), toNm(given[1])],
		width,
		height,
		regulator.orient
	);
	return {
		xNm: Math.round(toNm(regulator.xUm) + dx),
		yNm: Math.round(toNm(regulator.yUm) + dy)
	};
}

/**
 * Joins feeds and regulator pins to the nearest strap of their layer: feeds to the layer they name
 * or the highest one of their net, pins to the lowest one. Units that are not enabled get their taps
 * as well, so that switching one on or off leaves the network as it is, but no warnings or problems.
 */
export function findTaps(plan: PlanIndex, runs: Runs): Taps {
	const { floorplan, netOf, layerOf, layerCount, isHorizontal, patterns, groundNet } = plan;
	const warnings: ModelWarning[] = [];
	const problems: ModelProblem[] = [];

	/** Fills one entry; false where the net has no strap on the layer. */
	function join(
		taps: TapList,
		index: number,
		point: PointNm,
		net: number,
		layer: number,
		subject: { readonly path: string; readonly id: string; readonly isSilent?: boolean }
	): boolean {
		if (layer < 0) return false;
		const group = net * layerCount + layer;
		const [along, across] = isHorizontal[layer] ? [point.xNm, point.yNm] : [point.yNm, point.xNm];
		const foot = nearestRun(
			runs,
			runs.groupStart[group],
			runs.groupStart[group + 1],
			along,
			across
		);
		if (foot === null) return false;
		taps.run[index] = foot.run;
		taps.alongNm[index] = foot.alongNm;
		const { pitchNm } = patterns[runs.strap[foot.run]];
		if (foot.distanceNm > pitchNm && subject.isSilent !== true) {
			warnings.push({
				code: 'tap-far',
				message:
					`${subject.path}: the nearest strap of net ${floorplan.nets[net].id} on ` +
					`${floorplan.layers[layer].id} is ${Math.round(foot.distanceNm) / NM_PER_UM} um away, ` +
					`farther than one pitch (${pitchNm / NM_PER_UM} um)`,
				subject: subject.id,
				atUm: atUm(point)
			});
		}
		return true;
	}

	const feeds = emptyTaps(floorplan.feeds.length);
	for (const [f, feed] of floorplan.feeds.entries()) {
		const net = indexOfId(netOf, feed.net);
		const layer =
			feed.layer === undefined
				? outermostLayer(plan, runs, net, -1)
				: indexOfId(layerOf, feed.layer);
		const point = { xNm: toNm(feed.xUm), yNm: toNm(feed.yUm) };
		const path = `feeds (${feed.id})`;
		if (!join(feeds, f, point, net, layer, { path, id: feed.id })) {
			const where = feed.layer === undefined ? '' : ` on layer ${feed.layer}`;
			warnings.push({
				code: 'feed-unconnected',
				message: `${path}: net ${feed.net} has no strap${where} to join, so it feeds nothing`,
				subject: feed.id,
				atUm: atUm(point)
			});
		}
	}

	const outputs = emptyTaps(floorplan.regulators.length);
	const inputs = emptyTaps(floorplan.regulators.length);
	const grounds = emptyTaps(floorplan.regulators.length);
	for (const [r, regulator] of floorplan.regulators.entries()) {
		const pins: [Pin, TapList, number][] = [
			['output', outputs, indexOfId(netOf, regulator.output)]
		];
		if (regulator.input !== null) {
			pins.push(['input', inputs, indexOfId(netOf, regulator.input)]);
		}
		if (groundNet >= 0) pins.push(['ground', grounds, groundNet]);
		for (const [pin, taps, net] of pins) {
			const point = pinPosition(plan, regulator, pin);
			const path = `regulators (${regulator.id})`;
			const layer = outermostLayer(plan, runs, net, 1);
			const subject = {
				path: `${path} ${pin} pin`,
				id: regulator.id,
				isSilent: !regulator.enabled
			};
			if (!join(taps, r, point, net, layer, subject) && regulator.enabled) {
				problems.push({
					path,
					message:
						`net ${floorplan.nets[net].id} has no strap on the die that its ${pin} pin could join ` +
						`(expected a strap pattern of that net)`,
					subject: regulator.id,
					atUm: atUm(point)
				});
			}
		}
	}
	return { feeds, outputs, inputs, grounds, warnings, problems };
}
