import RBush from 'rbush';
import {
	boundsOf,
	boundsOverlap,
	orientedSize,
	polygonContainsBounds,
	polygonOverlapsBounds,
	type Bounds,
	type Outline
} from '#lib/geometry/index.ts';
import type { Floorplan } from '../document.ts';
import type { Keepout } from '../keepout.ts';
import { onGridUm, toNm, type OutlineUm } from '../primitives.ts';
import type { Regulator } from '../regulator.ts';

/** Why a regulator may not stand where it stands. */
export interface PlacementReason {
	readonly code: 'outside-die' | 'off-site' | 'keep-out' | 'overlap' | 'spacing' | 'no-cell';
	/** For people, naming the other object. */
	readonly message: string;
	/** Id of the keep-out or regulator in the way. */
	readonly other?: string;
}

interface Footprint extends Bounds {
	readonly id: string;
}

/** Footprints of all regulators, for repeated questions about one document. */
export interface PlacementIndex {
	readonly floorplan: Floorplan;
	readonly cells: ReadonlyMap<string, Floorplan['cells'][number]>;
	readonly footprints: RBush<Footprint>;
	readonly keepouts: readonly (Keepout & {
		readonly bounds: Bounds;
		readonly outlineNm: Outline;
	})[];
	/** The die outline in whole nanometres, in which containment is exact. */
	readonly dieNm: Outline;
}

/** Gaps closer to the limit than this are rounding, um. */
const GAP_TOLERANCE_UM = 1e-6;

/** Rectangle that a regulator covers, um on the nanometre grid; null where its cell is not defined. */
export function footprintOf(
	cells: PlacementIndex['cells'],
	{ cell: cellId, xUm, yUm, orient }: Pick<Regulator, 'cell' | 'xUm' | 'yUm' | 'orient'>
): Bounds | null {
	const cell = cells.get(cellId);
	if (!cell) return null;
	const [width, height] = orientedSize(cell.widthUm, cell.heightUm, orient);
	return { minX: xUm, minY: yUm, maxX: onGridUm(xUm + width), maxY: onGridUm(yUm + height) };
}

function outlineNm(outline: OutlineUm): Outline {
	return outline.map(([x, y]) => [toNm(x), toNm(y)]);
}

export function buildPlacementIndex(floorplan: Floorplan): PlacementIndex {
	const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
	const footprints = new RBush<Footprint>();
	footprints.load(
		floorplan.regulators.flatMap((regulator) => {
			const bounds = footprintOf(cells, regulator);
			return bounds ? [{ ...bounds, id: regulator.id }] : [];
		})
	);
	const keepouts = floorplan.keepouts
		.filter(({ forbids }) => forbids.includes('regulators'))
		.map((keepout) => ({
			...keepout,
			bounds: boundsOf(keepout.outline),
			outlineNm: outlineNm(keepout.outline)
		}));
	return { floorplan, cells, footprints, keepouts, dieNm: outlineNm(floorplan.die.outline) };
}

/** Gap between two rectangles that do not overlap, um. */
function gapUm(a: Bounds, b: Bounds): number {
	const dx = Math.max(0, a.minX - b.maxX, b.minX - a.maxX);
	const dy = Math.max(0, a.minY - b.maxY, b.minY - a.maxY);
	return Math.hypot(dx, dy);
}

function isOffPitch(um: number, originUm: number, pitchUm: number): boolean {
	return (toNm(um) - toNm(originUm)) % toNm(pitchUm) !== 0;
}

/**
 * Every reason against a regulator's place; none means that it is legal.
 *
 * @param ignore ids of regulators that do not count, such as those that move along
 */
export function checkPlacement(
	index: PlacementIndex,
	regulator: Pick<Regulator, 'id' | 'cell' | 'xUm' | 'yUm' | 'orient'>,
	ignore: ReadonlySet<string> = new Set()
): PlacementReason[] {
	const { floorplan, cells, footprints, keepouts } = index;
	const bounds = footprintOf(cells, regulator);
	if (!bounds) return [{ code: 'no-cell', message: `cell ${regulator.cell} is not defined` }];
	const boundsNm = {
		minX: toNm(bounds.minX),
		minY: toNm(bounds.minY),
		maxX: toNm(bounds.maxX),
		maxY: toNm(bounds.maxY)
	};
	const reasons: PlacementReason[] = [];
	if (!polygonContainsBounds(index.dieNm, boundsNm)) {
		reasons.push({ code: 'outside-die', message: 'reaches beyond the die outline' });
	}
	const { sites } = floorplan;
	if (
		sites &&
		(isOffPitch(regulator.xUm, sites.originUm[0], sites.pitchUm[0]) ||
			isOffPitch(regulator.yUm, sites.originUm[1], sites.pitchUm[1]))
	) {
		reasons.push({ code: 'off-site', message: 'does not stand on a site' });
	}
	for (const keepout of keepouts) {
		if (
			boundsOverlap(bounds, keepout.bounds) &&
			polygonOverlapsBounds(keepout.outlineNm, boundsNm)
		) {
			const name = keepout.name ?? keepout.id;
			reasons.push({ code: 'keep-out', message: `stands in keep-out ${name}`, other: keepout.id });
		}
	}
	const spacingUm = floorplan.limits.spacingUm ?? 0;
	const near = footprints.search({
		minX: bounds.minX - spacingUm,
		minY: bounds.minY - spacingUm,
		maxX: bounds.maxX + spacingUm,
		maxY: bounds.maxY + spacingUm
	});
	for (const other of near.sort((a, b) => (a.id < b.id ? -1 : 1))) {
		if (other.id === regulator.id || ignore.has(other.id)) continue;
		if (boundsOverlap(bounds, other)) {
			reasons.push({ code: 'overlap', message: `overlaps ${other.id}`, other: other.id });
		} else if (gapUm(bounds, other) < spacingUm - GAP_TOLERANCE_UM) {
			const gap = Math.round(gapUm(bounds, other) * 1000) / 1000;
			reasons.push({
				code: 'spacing',
				message: `${gap} um from ${other.id}, needs ${spacingUm} um`,
				other: other.id
			});
		}
	}
	return reasons;
}

/** The regulators that stand illegally, in document order, with every reason. */
export function checkAllPlacements(
	floorplan: Floorplan
): { regulator: Regulator; reasons: PlacementReason[] }[] {
	const index = buildPlacementIndex(floorplan);
	return floorplan.regulators
		.map((regulator) => ({ regulator, reasons: checkPlacement(index, regulator) }))
		.filter(({ reasons }) => reasons.length > 0);
}

/** The site nearest to a position, um; the position on the nanometre grid where there are no sites. */
export function snapToSite(floorplan: Floorplan, xUm: number, yUm: number): [number, number] {
	const { sites } = floorplan;
	const snap = (um: number, originUm: number, pitchUm: number) =>
		onGridUm(originUm + Math.round((um - originUm) / pitchUm) * pitchUm);
	if (!sites) return [onGridUm(xUm), onGridUm(yUm)];
	return [
		snap(xUm, sites.originUm[0], sites.pitchUm[0]),
		snap(yUm, sites.originUm[1], sites.pitchUm[1])
	];
}
