import type { ItemReference } from '#lib/floorplan/edits/index.ts';
import type { PointerInput } from '../../input.ts';
import type { ItemKey } from '../../selection.ts';

/** The ways between the states of the select tool, each with what the next state starts from. */
export interface SelectTransitions {
	idle(): void;
	pressing(start: PointerInput, pressed: ItemKey | null): void;
	dragging(start: PointerInput, grabbed: ItemReference): void;
	marquee(start: PointerInput): void;
}
