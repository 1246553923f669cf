import { toDie } from '../../camera.ts';
import type { Editor } from '../../editor.ts';
import type { PointerInput, ToolState } from '../../input.ts';
import { referenceOf } from '../../selection.ts';
import { idle } from './idle.ts';

/** A rectangle is drawn: what it encloses wholly is selected, with the modifier in addition. */
export function marquee(editor: Editor, start: PointerInput): ToolState {
	const from = toDie(editor.camera, start.point);
	const before = editor.selected;
	const end = () => {
		editor.overlay = {};
		editor.enter(idle(editor));
	};
	return {
		name: 'select.marquee',
		pointerMove({ point }) {
			const to = toDie(editor.camera, point);
			const bounds = {
				minX: Math.min(from[0], to[0]),
				minY: Math.min(from[1], to[1]),
				maxX: Math.max(from[0], to[0]),
				maxY: Math.max(from[1], to[1])
			};
			const enclosed = editor.scene.enclosed(bounds, editor.isShown).map(referenceOf);
			editor.select(start.isAdding ? [...before, ...enclosed] : enclosed);
			editor.showOverlay({ marquee: bounds });
		},
		pointerUp: end,
		cancel() {
			editor.select(before);
			end();
		}
	};
}
