import { toDie } from '../../camera.ts';
import type { Editor } from '../../editor.ts';
import type { PointerInput, ToolState } from '../../input.ts';
import { pressing } from './pressing.ts';

/** How near to a bump the pointer must be, px. */
const REACH_PX = 7;

/** The topmost visible item under the pointer. */
export function itemUnder(editor: Editor, { point }: PointerInput) {
	const reachUm = REACH_PX / editor.camera.pxPerUm;
	return editor.scene.hit(toDie(editor.camera, point), reachUm, editor.isShown);
}

/** Waiting: the pointer shows what it is over. */
export function idle(editor: Editor): ToolState {
	return {
		name: 'select.idle',
		pointerMove(input) {
			const hovered = itemUnder(editor, input);
			if (hovered === editor.hovered) return;
			editor.hovered = hovered;
			editor.changed();
		},
		pointerDown(input) {
			editor.enter(pressing(editor, input, itemUnder(editor, input)));
		}
	};
}
