import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import type { EditDraft, ItemReference, PlacedList } from '#lib/floorplan/edits/index.ts';
import type { PlacementReason } from '#lib/floorplan/legality/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import type { Camera } from '../camera.ts';
import type { PointerInput } from '../input.ts';
import type { Overlay } from '../overlay.ts';
import type { SceneIndex } from '../scene-index.ts';
import type { ItemKey } from '../selection.ts';

/** A step of an arrow key: right and up are 1. */
export type Direction = readonly [x: -1 | 0 | 1, y: -1 | 0 | 1];

/**
 * One state of a tool: a small machine moves from state to state as the pointer does. A state is
 * made when it is entered, with its start data as arguments, so that nothing of a gesture outlives
 * it.
 */
export interface ToolState {
	/** `tool.state`, for tests and for the pointer's shape. */
	readonly name: string;
	pointerDown?(input: PointerInput): void;
	pointerMove?(input: PointerInput): void;
	pointerUp?(input: PointerInput): void;
	/** An arrow key. A state without it leaves the key to the selection. */
	arrow?(direction: Direction, isLarge: boolean): void;
	/** Enter. */
	confirm?(): void;
	/** Escape, a right click, or the system took the pointer away: everything as before. */
	cancel?(): void;
}

/** What tools need of the editor. */
export interface ToolHost {
	readonly floorplan: Floorplan;
	readonly camera: Camera;
	readonly scene: SceneIndex;
	readonly selection: ReadonlySet<ItemKey>;
	readonly selected: ItemReference[];
	hovered: ItemKey | null;
	isShown(list: PlacedList): boolean;
	/** Whether the person may move it, and it is not fixed. */
	canMove(reference: ItemReference): boolean;
	/** Reasons against a place of a regulator that is not in the document yet. */
	reasonsAgainst(regulator: Regulator): PlacementReason[];
	/** Reasons against moving regulators by a distance, by id. */
	reasonsAfterMove(
		references: readonly ItemReference[],
		dxUm: number,
		dyUm: number
	): Map<string, PlacementReason[]>;
	/** Things in view, but for some, for what is moved to agree with. */
	neighbours(except: readonly ItemReference[]): Bounds[];
	select(references: readonly ItemReference[], isAdding?: boolean): void;
	/** Makes an edit: one step of undo. */
	execute(draft: EditDraft): boolean;
	showOverlay(overlay: Overlay): void;
	/** Tells the person why something was not done. */
	refuse(reason: string): void;
	enter(state: ToolState): void;
	/** Back to the select tool. */
	leaveTool(): void;
	changed(): void;
}
