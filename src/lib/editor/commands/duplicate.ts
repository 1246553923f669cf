import { duplicateItems, findItem, type ItemReference } from '#lib/floorplan/edits/index.ts';
import { onGridUm } from '#lib/floorplan/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import type { Editor } from '../editor.ts';
import { keyOf } from '../selection.ts';
import { nudgeStepUm } from '../snapping.ts';

/** Free space between a thing and its copy where no limit asks for more, um. */
const GAP_UM = 10;
/** How many widths away a place for the copies is looked for. */
const MOST_STEPS = 12;

function around(all: readonly Bounds[]): Bounds {
	return {
		minX: Math.min(...all.map(({ minX }) => minX)),
		minY: Math.min(...all.map(({ minY }) => minY)),
		maxX: Math.max(...all.map(({ maxX }) => maxX)),
		maxY: Math.max(...all.map(({ maxY }) => maxY))
	};
}

/** Distances to try, nearest ring first: right, below, left, above. */
function distances(stepX: number, stepY: number): (readonly [number, number])[] {
	return Array.from({ length: MOST_STEPS }, (_, k) => k + 1).flatMap((k) => [
		[onGridUm(k * stepX), 0] as const,
		[0, onGridUm(-k * stepY)] as const,
		[onGridUm(-k * stepX), 0] as const,
		[0, onGridUm(k * stepY)] as const
	]);
}

/** Whether copies at a distance would lie exactly on things of the same kind. */
function coincides(
	editor: Editor,
	references: readonly ItemReference[],
	dxUm: number,
	dyUm: number
): boolean {
	return references.some(({ list, id }) => {
		const own = editor.scene.boundsOf(keyOf({ list, id }));
		if (!own) return false;
		return editor.floorplan[list].some((other) => {
			const there = editor.scene.boundsOf(keyOf({ list, id: other.id }));
			return (
				there !== undefined &&
				onGridUm(own.minX + dxUm) === onGridUm(there.minX) &&
				onGridUm(own.minY + dyUm) === onGridUm(there.minY)
			);
		});
	});
}

function isLegal(
	editor: Editor,
	references: readonly ItemReference[],
	dxUm: number,
	dyUm: number
): boolean {
	return references.every(({ list, id }) => {
		const regulator = list === 'regulators' ? findItem(editor.floorplan, list, id) : undefined;
		if (!regulator) return true;
		const copy = { ...regulator, id: '', xUm: regulator.xUm + dxUm, yUm: regulator.yUm + dyUm };
		return editor.reasonsAgainst(copy).length === 0;
	});
}

/**
 * Copies of the selection beside it: at the nearest place to the right, below, left or above where
 * all of them stand legally; else at the nearest where none lies exactly on another thing.
 */
export function duplicate(editor: Editor): void {
	const { floorplan, selected } = editor;
	const bounds = selected.flatMap((item) => editor.scene.boundsOf(keyOf(item)) ?? []);
	if (bounds.length === 0) return;
	const { minX, minY, maxX, maxY } = around(bounds);
	const [pitchX, pitchY] = nudgeStepUm(floorplan, selected);
	const gap = Math.max(GAP_UM, floorplan.limits.spacingUm ?? 0);
	const whole = (um: number, pitchUm: number) => Math.ceil(um / pitchUm - 1e-9) * pitchUm;
	const tries = distances(whole(maxX - minX + gap, pitchX), whole(maxY - minY + gap, pitchY));
	const free = tries.filter(([dx, dy]) => !coincides(editor, selected, dx, dy));
	const best = free.find(([dx, dy]) => isLegal(editor, selected, dx, dy)) ?? free[0];
	if (!best) {
		editor.refuse('Not duplicated: there is no free place beside the selection.');
		return;
	}
	const draft = duplicateItems(floorplan, selected, ...best);
	if (editor.execute(draft)) editor.select(draft.copies);
}
