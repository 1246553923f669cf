import { moveItems, type ItemReference } from '#lib/floorplan/edits/index.ts';
import type { Editor } from '../../editor.ts';
import type { PointerInput, ToolState } from '../../input.ts';
import { keyOf } from '../../selection.ts';
import { snapMove } from '../../snapping.ts';
import { idle } from './idle.ts';

/**
 * The selection follows the pointer. Every step is computed from where the drag began, never from
 * the last one, so that nothing drifts; giving up leaves document and history untouched.
 */
export function dragging(editor: Editor, start: PointerInput, grabbed: ItemReference): ToolState {
	const moving = editor.selected.filter(({ list, id }) => {
		const regulator =
			list === 'regulators' && editor.floorplan.regulators.find((one) => one.id === id);
		return !(regulator && regulator.fixed);
	});
	const keys = new Set(moving.map(keyOf));
	let distance: readonly [number, number] = [0, 0];
	const end = () => {
		editor.overlay = {};
		editor.enter(idle(editor));
	};
	return {
		name: 'select.dragging',
		pointerMove({ point, isFree }) {
			const { pxPerUm } = editor.camera;
			const dxUm = (point[0] - start.point[0]) / pxPerUm;
			const dyUm = -(point[1] - start.point[1]) / pxPerUm;
			const onGrid = (um: number) => Math.round(um * 1000) / 1000;
			distance = isFree
				? [onGrid(dxUm), onGrid(dyUm)]
				: snapMove(editor.floorplan, grabbed, dxUm, dyUm);
			const reasons = editor.reasonsAfterMove(moving, ...distance);
			editor.showOverlay({ drag: { keys, dxUm: distance[0], dyUm: distance[1], reasons } });
		},
		pointerUp() {
			end();
			editor.execute(moveItems(editor.floorplan, moving, ...distance));
		},
		cancel: end
	};
}
