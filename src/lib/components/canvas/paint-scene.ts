import { boundsOf } from '#lib/geometry/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { PlacedList } from '#lib/floorplan/edits/index.ts';
import { footprintOf } from '#lib/floorplan/legality/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import type { Visibility } from '#lib/editor/index.ts';
import {
	cellsById,
	paintBlock,
	paintFeed,
	paintKeepout,
	paintRegulator,
	paintSpot,
	type PaintContext
} from '#lib/editor/paint/index.ts';

export interface Scene {
	readonly floorplan: Floorplan;
	/** Places in their lists of what is in view. */
	readonly shown: Readonly<Record<PlacedList, readonly number[]>>;
	readonly visibility: Visibility;
	readonly modeId: string;
	readonly result: ResultFile | null;
	readonly spots: ResultFile['spots'];
}

/** Draws the placed things in view, from what lies low to what lies on top. */
export function paintScene(paint: PaintContext, scene: Scene): void {
	const { floorplan, shown, visibility, modeId, result, spots } = scene;
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
		const illegal = new Set(
			result?.findings.flatMap(({ kind, subject }) => (kind === 'placement' ? [subject] : []))
		);
		for (const index of shown.regulators) {
			const regulator = floorplan.regulators[index];
			const bounds = footprintOf(cells, regulator);
			if (!bounds) continue;
			// Results keep the order of the document, unless it was edited since.
			const found = result?.regulators[index];
			const own = found?.id === regulator.id ? found : null;
			paintRegulator(paint, regulator, bounds, own, illegal.has(regulator.id));
		}
	}
	spots.forEach(({ xUm, yUm, marginV }, i) =>
		paintSpot(paint, i + 1, xUm, yUm, (marginV ?? 0) < 0)
	);
}
