import type { PointerInput } from '../../input.ts';
import { referenceOf, type ItemKey } from '../../selection.ts';
import type { ToolHost, ToolState } from '../tool.ts';
import type { SelectTransitions } from './transitions.ts';

/** The pointer may tremble this far before a press becomes a drag, px. */
const DRAG_THRESHOLD_PX = 3;

/**
 * The button is down: a click, a drag of things or a marquee, as the pointer will tell. Blocks and
 * keep-outs cover most of a die, so they are only dragged when they are selected already; a drag
 * that begins on another one draws a marquee.
 */
export function pressing(
	host: ToolHost,
	go: SelectTransitions,
	start: PointerInput,
	pressed: ItemKey | null
): ToolState {
	const item = pressed === null ? null : referenceOf(pressed);
	const wasSelected = pressed !== null && host.selection.has(pressed);
	const isArea = item?.list === 'blocks' || item?.list === 'keepouts';

	function beginDrag(): void {
		host.hovered = null;
		if (!item || start.isAdding || (isArea && !wasSelected)) return go.marquee(start);
		if (!host.canMove(item)) {
			host.refuse(`${item.id} is fixed, or not yours to move.`);
			return go.idle();
		}
		if (!wasSelected) host.select([item]);
		go.dragging(start, item);
	}

	return {
		name: 'select.pressing',
		pointerMove({ point }) {
			const moved = Math.hypot(point[0] - start.point[0], point[1] - start.point[1]);
			if (moved >= DRAG_THRESHOLD_PX) beginDrag();
		},
		pointerUp() {
			if (item) host.select([item], start.isAdding);
			else if (!start.isAdding) host.select([]);
			go.idle();
		},
		cancel() {
			go.idle();
		}
	};
}
