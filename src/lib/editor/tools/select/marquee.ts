import { toDie } from '../../camera.ts';
import type { PointerInput } from '../../input.ts';
import { keyOf, referenceOf } from '../../selection.ts';
import type { ToolHost, ToolState } from '../tool.ts';
import type { SelectTransitions } from './transitions.ts';

/** A rectangle is drawn: what it encloses wholly is selected, with the modifier in addition. */
export function marquee(host: ToolHost, go: SelectTransitions, start: PointerInput): ToolState {
	const from = toDie(host.camera, start.point);
	const before = host.selected.map(keyOf);
	const end = () => {
		host.showOverlay({});
		go.idle();
	};
	return {
		name: 'select.marquee',
		pointerMove({ point }) {
			const to = toDie(host.camera, point);
			const bounds = {
				minX: Math.min(from[0], to[0]),
				minY: Math.min(from[1], to[1]),
				maxX: Math.max(from[0], to[0]),
				maxY: Math.max(from[1], to[1])
			};
			const enclosed = host.scene.enclosed(bounds, host.isShown);
			const keys = new Set(start.isAdding ? [...before, ...enclosed] : enclosed);
			host.select([...keys].map(referenceOf));
			host.showOverlay({ marquee: bounds });
		},
		pointerUp: end,
		cancel() {
			host.select(before.map(referenceOf));
			end();
		}
	};
}
