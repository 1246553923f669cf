import type { Editor } from '../../editor.ts';
import type { PointerInput, ToolState } from '../../input.ts';
import { referenceOf, type ItemKey } from '../../selection.ts';
import { dragging } from './dragging.ts';
import { idle } from './idle.ts';
import { marquee } from './marquee.ts';

/** The pointer may tremble this far before a press becomes a drag, px. */
const DRAG_THRESHOLD_PX = 3;

/** The button is down: a click, a drag of things or a marquee, as the pointer will tell. */
export function pressing(editor: Editor, start: PointerInput, pressed: ItemKey | null): ToolState {
	const wasSelected = pressed !== null && editor.selection.has(pressed);
	if (pressed !== null && !wasSelected) {
		editor.select([referenceOf(pressed)], start.isAdding);
	}
	return {
		name: 'select.pressing',
		pointerMove(input) {
			const moved = Math.hypot(input.point[0] - start.point[0], input.point[1] - start.point[1]);
			if (moved < DRAG_THRESHOLD_PX) return;
			const next =
				pressed !== null && editor.canDraw && editor.selection.has(pressed)
					? dragging(editor, start, referenceOf(pressed))
					: marquee(editor, start);
			editor.enter(next);
			next.pointerMove?.(input);
		},
		pointerUp(input) {
			editor.enter(idle(editor));
			if (pressed === null) {
				if (!input.isAdding) editor.select([]);
			} else if (wasSelected) {
				// A click on one of many selects it alone; with the modifier it leaves the selection.
				editor.select([referenceOf(pressed)], input.isAdding);
			}
		},
		cancel() {
			editor.enter(idle(editor));
		}
	};
}
