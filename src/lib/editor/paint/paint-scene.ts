import { boundsOf, type Bounds } from '#lib/geometry/index.ts';
import type { Cell, Floorplan, Regulator } from '#lib/floorplan/index.ts';
import type { PlacedList } from '#lib/floorplan/edits/index.ts';
import { footprintOf } from '#lib/floorplan/legality/index.ts';
import type { RegulatorResult, Spot } from '#lib/results/index.ts';
import type { Visibility } from '../visibility.ts';
import { cellsById, type PaintContext } from './paint-context.ts';
import { paintSpot } from './paint-marks.ts';
import { paintBlock, paintFeed, paintKeepout } from './paint-objects.ts';
import { paintRegulator, type RegulatorPicture } from './paint-regulator.ts';

export interface Scene {
	readonly floorplan: Floorplan;
	/** Places in their lists of what is in view. */
	readonly shown: Readonly<Record<PlacedList, readonly number[]>>;
	readonly visibility: Visibility;
	readonly modeId: string;
	/** What the result shown says of each regulator, by id. */
	readonly results: ReadonlyMap<string, RegulatorResult>;
	/** Regulators that stand illegally, by id. */
	readonly problems: ReadonlyMap<string, unknown>;
	readonly spots: readonly Spot[];
}

/** How a regulator of the document is drawn; null where its cell is not defined. */
export function pictureOf(
	cells: ReadonlyMap<string, Cell>,
	regulator: Regulator,
	result: RegulatorResult | undefined,
	isIllegal: boolean
): RegulatorPicture | null {
	const bounds: Bounds | null = footprintOf(cells, regulator);
	if (!bounds) return null;
	const { id, enabled, fixed } = regulator;
	return {
		id,
		bounds,
		isEnabled: enabled,
		isFixed: fixed,
		result: result ?? null,
		isIllegal
	};
}

/** Draws the placed things in view, from what lies low to what lies on top. */
export function paintScene(paint: PaintContext, scene: Scene): void {
	const { floorplan, shown, visibility, modeId, results, problems, spots } = scene;
	const { lists } = visibility;
	if (lists.keepouts) {
		for (const index of shown.keepouts) {
			const keepout = floorplan.keepouts[index];
			paintKeepout(paint, keepout, boundsOf(keepout.outline));
		}
	}
	if (lists.feeds) {
		const grounds = new Set(
			floorplan.nets.flatMap(({ id, kind }) => (kind === 'ground' ? [id] : []))
		);
		for (const index of shown.feeds) {
			const feed = floorplan.feeds[index];
			paintFeed(paint, feed, grounds.has(feed.net));
		}
	}
	if (lists.blocks) {
		for (const index of shown.blocks) {
			const block = floorplan.blocks[index];
			paintBlock(paint, block, boundsOf(block.outline), modeId);
		}
	}
	if (lists.regulators) {
		const cells = cellsById(floorplan);
		for (const index of shown.regulators) {
			const regulator = floorplan.regulators[index];
			const { id } = regulator;
			const picture = pictureOf(cells, regulator, results.get(id), problems.has(id));
			if (picture) paintRegulator(paint, picture);
		}
	}
	spots.forEach(({ xUm, yUm, marginV }, i) =>
		paintSpot(paint, i + 1, xUm, yUm, (marginV ?? 0) < 0)
	);
}
