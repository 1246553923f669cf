import type { Floorplan } from '#lib/floorplan/index.ts';
import { checkAllPlacements, footprintOf } from '#lib/floorplan/legality/index.ts';
import type { Network } from '#lib/mesh/index.ts';
import type { OperatingPoint } from '#lib/solver/index.ts';
import { pieceMiddleUm, type MetalLoads } from './metal-load.ts';
import { limitsFor, netDropLimit, roundedUm } from './readings.ts';
import type { BlockResult, FeedResult, Finding, NetResult, RegulatorResult } from './schema.ts';

/** A value must exceed its limit by this much, relatively, to break it: rounding alone does not. */
const ROUNDING = 1e-9;

function exceeds(value: number, limit: number | null | undefined): limit is number {
	return limit !== undefined && limit !== null && value > limit + ROUNDING * Math.max(limit, 1e-3);
}

function milli(value: number): string {
	return `${Number((value * 1000).toPrecision(4))} mV`;
}

function percent(value: number): string {
	return `${Number((value * 100).toPrecision(4))} %`;
}

/** What the findings are drawn from. */
export interface FindingInputs {
	readonly floorplan: Floorplan;
	readonly network: Network;
	readonly point: OperatingPoint;
	readonly nets: readonly NetResult[];
	readonly blocks: readonly BlockResult[];
	readonly regulators: readonly RegulatorResult[];
	readonly feeds: readonly FeedResult[];
	readonly metal: MetalLoads;
}

function netFindings({ floorplan, nets }: FindingInputs): Finding[] {
	return nets.flatMap((net): Finding[] => {
		const planNet = floorplan.nets.find((candidate) => candidate.id === net.id);
		const limits = limitsFor(floorplan, net.id);
		const found: Finding[] = [];
		const base = { list: 'nets', subject: net.id } as const;
		const atUm: [number, number] = [net.worst.xUm, net.worst.yUm];
		const dropLimit = planNet && netDropLimit(floorplan, planNet);
		if (exceeds(net.worstDropV, dropLimit)) {
			found.push({
				kind: 'drop',
				...base,
				value: net.worstDropV,
				limit: dropLimit,
				unit: 'V',
				message: `net ${net.id} drops ${milli(net.worstDropV)}, more than ${milli(dropLimit)}`,
				atUm
			});
		}
		if (exceeds(net.worstRiseV, limits.riseV)) {
			found.push({
				kind: 'rise',
				...base,
				value: net.worstRiseV,
				limit: limits.riseV,
				unit: 'V',
				message: `net ${net.id} rises ${milli(net.worstRiseV)} above nominal, more than ${milli(limits.riseV)}`
			});
		}
		if (net.sharingSpread !== null && exceeds(net.sharingSpread, limits.sharingSpread)) {
			found.push({
				kind: 'sharing-spread',
				...base,
				value: net.sharingSpread,
				limit: limits.sharingSpread,
				unit: '',
				message:
					`the regulator currents of net ${net.id} differ by ` +
					`${Number(net.sharingSpread.toPrecision(4))} times their mean, more than ${limits.sharingSpread}`
			});
		}
		return found;
	});
}

function blockFindings({ floorplan, point, blocks }: FindingInputs): Finding[] {
	const collapsed = new Set(point.collapsedBlocks.map((index) => floorplan.blocks[index].id));
	return blocks.flatMap((block): Finding[] => {
		const found: Finding[] = [];
		const base = { list: 'blocks', subject: block.id } as const;
		if (collapsed.has(block.id)) {
			const planNet = floorplan.nets.find((net) => net.id === block.net);
			found.push({
				kind: 'collapsed',
				...base,
				value: block.minV,
				limit: 0.1 * (planNet?.volts ?? 0),
				unit: 'V',
				message:
					`block ${block.id} sees ${milli(block.minV)}, less than a tenth of nominal: ` +
					`its rail cannot bring what it draws`,
				atUm: block.atUm
			});
		}
		if (exceeds(block.worstDropV, block.limitV)) {
			found.push({
				kind: 'drop',
				...base,
				value: block.worstDropV,
				limit: block.limitV,
				unit: 'V',
				message: `block ${block.id} sees a drop of ${milli(block.worstDropV)}, more than ${milli(block.limitV)}`,
				atUm: block.atUm
			});
		}
		return found;
	});
}

/** Middle of a regulator's footprint, um; its corner where its cell is not defined. */
function placeOf(
	cells: ReadonlyMap<string, Floorplan['cells'][number]>,
	unit: Floorplan['regulators'][number]
): [number, number] {
	const bounds = footprintOf(cells, unit);
	if (bounds === null) return [unit.xUm, unit.yUm];
	return roundedUm((bounds.minX + bounds.maxX) / 2, (bounds.minY + bounds.maxY) / 2);
}

/** One finding per regulator that stands where it may not. */
function placementFindings({ floorplan }: FindingInputs): Finding[] {
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	return checkAllPlacements(floorplan).map(({ regulator, reasons }): Finding => ({
		kind: 'placement',
		list: 'regulators',
		subject: regulator.id,
		value: reasons.length,
		limit: 0,
		unit: '',
		message: `regulator ${regulator.id} ${reasons.map(({ message }) => message).join('; ')}`,
		atUm: placeOf(cells, regulator)
	}));
}

function regulatorFindings({ floorplan, regulators }: FindingInputs): Finding[] {
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	return floorplan.regulators.flatMap((unit, index): Finding[] => {
		const result = regulators[index];
		const cell = cells.get(unit.cell);
		if (cell === undefined || result.state === 'off') return [];
		const limits = limitsFor(floorplan, unit.output);
		const base = {
			list: 'regulators',
			subject: unit.id,
			atUm: placeOf(cells, unit)
		} as const;
		const found: Finding[] = [];
		if (exceeds(result.loadFraction, limits.regulatorLoad)) {
			found.push({
				kind: 'regulator-load',
				...base,
				value: result.loadFraction,
				limit: limits.regulatorLoad,
				unit: '',
				message: `regulator ${unit.id} gives ${percent(result.loadFraction)} of its rating, more than ${percent(limits.regulatorLoad)}`
			});
		}
		if (limits.belowMinA === 'flag' && exceeds(cell.minA, Math.max(result.amps, 0))) {
			found.push({
				kind: 'below-min-current',
				...base,
				value: result.amps,
				limit: cell.minA,
				unit: 'A',
				message: `regulator ${unit.id} gives ${Number((result.amps * 1000).toPrecision(4))} mA, less than its stable minimum of ${cell.minA * 1000} mA`
			});
		}
		const { headroomV } = result;
		if (headroomV !== null && limits.headroomV !== undefined) {
			if (headroomV < limits.headroomV - ROUNDING) {
				found.push({
					kind: 'headroom',
					...base,
					value: headroomV,
					limit: limits.headroomV,
					unit: 'V',
					message: `regulator ${unit.id} has ${milli(headroomV)} of headroom, less than ${milli(limits.headroomV)}`
				});
			}
		}
		return found;
	});
}

function feedFindings({ floorplan, feeds }: FindingInputs): Finding[] {
	return floorplan.feeds.flatMap((feed, index): Finding[] => {
		const { loadFraction } = feeds[index];
		const limit = limitsFor(floorplan, feed.net).feedLoad;
		if (loadFraction === null || !exceeds(loadFraction, limit)) return [];
		return [
			{
				kind: 'feed-load',
				list: 'feeds',
				subject: feed.id,
				value: loadFraction,
				limit,
				unit: '',
				message: `feed ${feed.id} carries ${percent(loadFraction)} of its limit, more than ${percent(limit)}`,
				atUm: [feed.xUm, feed.yUm]
			}
		];
	});
}

/** One finding per strap pattern, and per via rule and net, at its most loaded place. */
function metalFindings({ floorplan, metal }: FindingInputs): Finding[] {
	const found: Finding[] = [];
	const seen = new Set<string>();
	for (const strap of metal.straps) {
		const limit = limitsFor(floorplan, strap.net).strapLoad;
		if (seen.has(strap.strap) || !exceeds(strap.loadFraction, limit)) continue;
		seen.add(strap.strap);
		found.push({
			kind: 'strap-load',
			list: 'straps',
			subject: strap.strap,
			value: strap.loadFraction,
			limit,
			unit: '',
			message: `a strap of ${strap.strap} carries ${percent(strap.loadFraction)} of its limit, more than ${percent(limit)}`,
			atUm: pieceMiddleUm(strap)
		});
	}
	for (const via of metal.vias) {
		const limit = limitsFor(floorplan, via.net).viaLoad;
		const key = `${via.via} ${via.net}`;
		if (seen.has(key) || !exceeds(via.loadFraction, limit)) continue;
		seen.add(key);
		found.push({
			kind: 'via-load',
			list: 'vias',
			subject: via.via,
			partner: via.net,
			value: via.loadFraction,
			limit,
			unit: '',
			message: `a via of ${via.via} on net ${via.net} carries ${percent(via.loadFraction)} of its limit, more than ${percent(limit)}`,
			atUm: via.atUm
		});
	}
	return found;
}

function shortFindings({ network }: FindingInputs): Finding[] {
	return network.shorts.map((short): Finding => ({
		kind: 'short',
		list: 'straps',
		subject: short.straps[0],
		partner: short.straps[1],
		value: short.count,
		limit: 0,
		unit: '',
		message:
			`straps ${short.straps[0]} (net ${short.nets[0]}) and ${short.straps[1]} (net ` +
			`${short.nets[1]}) overlap on ${short.layer} in ${short.count} places`,
		atUm: [...short.atUm]
	}));
}

/** Every limit that the answer breaks, and what is wrong with the placement; grouped by kind of item. */
export function listFindings(inputs: FindingInputs): Finding[] {
	return [
		...netFindings(inputs),
		...blockFindings(inputs),
		...regulatorFindings(inputs),
		...feedFindings(inputs),
		...metalFindings(inputs),
		...placementFindings(inputs),
		...shortFindings(inputs)
	];
}
