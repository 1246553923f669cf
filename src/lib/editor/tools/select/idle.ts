import { toDie } from '../../camera.ts';
import type { PointerInput } from '../../input.ts';
import type { ItemKey } from '../../selection.ts';
import type { ToolHost, ToolState } from '../tool.ts';
import type { SelectTransitions } from './transitions.ts';

/** How near to a bump or a small regulator the pointer must be, px. */
const REACH_PX = 7;

/** The topmost visible item under the pointer. */
function itemUnder({ camera, scene, isShown }: ToolHost, { point }: PointerInput): ItemKey | null {
	return scene.hit(toDie(camera, point), REACH_PX / camera.pxPerUm, isShown);
}

/** Waiting: the pointer shows what it is over. */
export function idle(host: ToolHost, go: SelectTransitions): ToolState {
	return {
		name: 'select.idle',
		pointerMove(input) {
			const hovered = itemUnder(host, input);
			if (hovered === host.hovered) return;
			host.hovered = hovered;
			host.changed();
		},
		pointerDown(input) {
			go.pressing(input, itemUnder(host, input));
		}
	};
}
