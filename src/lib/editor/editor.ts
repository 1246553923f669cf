import { boundsOf, type Bounds } from '#lib/geometry/index.ts';
import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import {
	isPlaced,
	type ApplyResult,
	type EditDraft,
	type ItemReference,
	type Operation,
	type PlacedList
} from '#lib/floorplan/edits/index.ts';
import {
	buildPlacementIndex,
	checkPlacement,
	type PlacementIndex,
	type PlacementReason
} from '#lib/floorplan/legality/index.ts';
import { fit, panBy, zoomAt, type Camera } from './camera.ts';
import { History } from './history.ts';
import type { PointerInput, ToolState } from './input.ts';
import type { ScreenPoint } from './points.ts';
import { SceneIndex } from './scene-index.ts';
import { keyOf, referenceOf, type ItemKey } from './selection.ts';
import { idle } from './tools/select/idle.ts';
import type { Visibility } from './visibility.ts';
import { everythingVisible } from './visibility.ts';

/** What the editor needs from whoever keeps the document. */
export interface DocumentKeeper {
	/** Applies an edit to the local document and sends it; the document has changed when this returns. */
	submit(draft: EditDraft): ApplyResult;
}

/** Things that are being dragged, before they are let go. */
export interface DragPreview {
	readonly keys: ReadonlySet<ItemKey>;
	readonly dxUm: number;
	readonly dyUm: number;
	/** Reasons against the new places, by regulator id. */
	readonly reasons: ReadonlyMap<string, readonly PlacementReason[]>;
}

/** A regulator that follows the pointer until it is placed. */
export interface Ghost {
	readonly regulator: Regulator;
	readonly reasons: readonly PlacementReason[];
}

/** What is drawn over the document while a tool works. */
export interface Overlay {
	readonly drag?: DragPreview;
	readonly marquee?: Bounds;
	readonly ghost?: Ghost;
}

type Listener = () => void;

/**
 * The editor without a screen: document, selection, camera, tools and history. Everything that can
 * be seen is in its fields; listeners hear that something changed and read what they need.
 */
export class Editor {
	#floorplan: Floorplan;
	#keeper: DocumentKeeper;
	#scene: SceneIndex;
	#placements: PlacementIndex | null = null;
	#listeners = new Set<Listener>();
	#state: ToolState;
	#history = new History();
	#burst = 0;

	selection: ReadonlySet<ItemKey> = new Set();
	hovered: ItemKey | null = null;
	overlay: Overlay = {};
	visibility: Visibility;
	/** Whether the person may change the drawing. */
	canDraw: boolean;
	/** Why the last edit did not take effect; cleared by the next one that does. */
	refusal: string | null = null;
	camera: Camera = { centreXUm: 0, centreYUm: 0, pxPerUm: 0.1, widthPx: 1, heightPx: 1 };
	/** The camera still follows the canvas's size: nobody has moved it yet. */
	#isFitted = true;

	constructor(floorplan: Floorplan, keeper: DocumentKeeper, canDraw: boolean) {
		this.#floorplan = floorplan;
		this.#keeper = keeper;
		this.#scene = new SceneIndex(floorplan);
		this.canDraw = canDraw;
		this.visibility = everythingVisible(floorplan);
		this.#state = idle(this);
	}

	get floorplan(): Floorplan {
		return this.#floorplan;
	}

	get scene(): SceneIndex {
		return this.#scene;
	}

	get state(): ToolState {
		return this.#state;
	}

	get undoLabel(): string | null {
		return this.#history.undoLabel;
	}

	get redoLabel(): string | null {
		return this.#history.redoLabel;
	}

	get selected(): ItemReference[] {
		return [...this.selection].map(referenceOf);
	}

	/** Footprints of the present document, for questions of legality. */
	get placements(): PlacementIndex {
		this.#placements ??= buildPlacementIndex(this.#floorplan);
		return this.#placements;
	}

	subscribe(listener: Listener): () => void {
		this.#listeners.add(listener);
		return () => this.#listeners.delete(listener);
	}

	changed(): void {
		for (const listener of this.#listeners) listener();
	}

	/** The document has changed, by an edit here or somewhere else. */
	documentChanged(floorplan: Floorplan): void {
		if (floorplan === this.#floorplan) return;
		this.#floorplan = floorplan;
		this.#scene = new SceneIndex(floorplan);
		this.#placements = null;
		const kept = [...this.selection].filter((key) => this.#exists(key));
		if (kept.length < this.selection.size) this.selection = new Set(kept);
		if (this.hovered && !this.#exists(this.hovered)) this.hovered = null;
		this.changed();
	}

	#exists(key: ItemKey): boolean {
		const { list, id } = referenceOf(key);
		return this.#floorplan[list].some((item) => item.id === id);
	}

	/**
	 * Makes an edit. Returns whether it took effect; why not stands in `refusal`.
	 *
	 * @param burst edits with the same name in a row are one step of undo
	 */
	execute(draft: EditDraft, burst: string | null = null): boolean {
		if (draft.operations.length === 0) return false;
		const inverse = this.#submit(draft);
		if (inverse) this.#history.record(draft, inverse, burst && `${burst}:${this.#burst}`);
		this.changed();
		return inverse !== null;
	}

	/** The operations that lead back, or null where the edit did not take effect. */
	#submit(draft: EditDraft): readonly Operation[] | null {
		const result = this.#keeper.submit(draft);
		switch (result.status) {
			case 'applied':
				this.refusal = null;
				return result.inverse;
			case 'refused':
				this.refusal = `${result.problems[0].path}: ${result.problems[0].message}`;
				return null;
			case 'conflict':
				this.refusal =
					'Somebody else has changed the same thing meanwhile; it stays as they left it.';
				return null;
		}
	}

	/** The next edit of a burst begins a new step of undo. */
	endBurst(): void {
		this.#burst++;
	}

	undo(): void {
		const step = this.#history.undo();
		if (step && this.#submit(step.draft)) step.undone();
		this.changed();
	}

	redo(): void {
		const step = this.#history.redo();
		if (step && this.#submit(step.draft)) step.redone();
		this.changed();
	}

	select(references: readonly ItemReference[], isAdding = false): void {
		const keys = references.map(keyOf);
		const next = new Set(isAdding ? this.selection : []);
		for (const key of keys) {
			if (isAdding && this.selection.has(key)) next.delete(key);
			else next.add(key);
		}
		this.selection = next;
		this.endBurst();
		this.changed();
	}

	isShown = (list: PlacedList): boolean => this.visibility.lists[list];

	/** Reasons against moving regulators by a distance, by id. */
	reasonsAfterMove(
		references: readonly ItemReference[],
		dxUm: number,
		dyUm: number
	): Map<string, PlacementReason[]> {
		const moving = new Set(
			references.filter(({ list }) => list === 'regulators').map(({ id }) => id)
		);
		const reasons = new Map<string, PlacementReason[]>();
		for (const regulator of this.#floorplan.regulators) {
			if (!moving.has(regulator.id)) continue;
			const moved = { ...regulator, xUm: regulator.xUm + dxUm, yUm: regulator.yUm + dyUm };
			const found = checkPlacement(this.placements, moved, moving);
			if (found.length > 0) reasons.set(regulator.id, found);
		}
		return reasons;
	}

	// Tools.

	enter(state: ToolState): void {
		this.#state = state;
		this.changed();
	}

	pointerDown(input: PointerInput): void {
		this.endBurst();
		this.#state.pointerDown?.(input);
	}

	pointerMove(input: PointerInput): void {
		this.#state.pointerMove?.(input);
	}

	pointerUp(input: PointerInput): void {
		this.#state.pointerUp?.(input);
	}

	/** Gives up what the tool is doing; where it does nothing, the selection is cleared. */
	cancel(): void {
		if (this.#state.cancel) this.#state.cancel();
		else if (this.selection.size > 0) this.select([]);
	}

	showOverlay(overlay: Overlay): void {
		this.overlay = overlay;
		this.changed();
	}

	// Camera.

	resize(widthPx: number, heightPx: number): void {
		this.camera = { ...this.camera, widthPx, heightPx };
		if (this.#isFitted) this.fitAll();
		else this.changed();
	}

	pan(dxPx: number, dyPx: number): void {
		this.#isFitted = false;
		this.camera = panBy(this.camera, dxPx, dyPx);
		this.changed();
	}

	zoom(point: ScreenPoint, factor: number): void {
		this.#isFitted = false;
		this.camera = zoomAt(this.camera, point, factor);
		this.changed();
	}

	fitAll(): void {
		this.#isFitted = true;
		this.camera = fit(this.camera, boundsOf(this.#floorplan.die.outline));
		this.changed();
	}

	/** Shows the selected things, with their surroundings. */
	fitSelection(): void {
		const bounds = [...this.selection].flatMap((key) => this.#scene.boundsOf(key) ?? []);
		if (bounds.length === 0) return this.fitAll();
		this.#isFitted = false;
		const surroundingsUm = 100;
		const mostPxPerUm = 2;
		this.camera = fit(
			this.camera,
			{
				minX: Math.min(...bounds.map(({ minX }) => minX)) - surroundingsUm,
				minY: Math.min(...bounds.map(({ minY }) => minY)) - surroundingsUm,
				maxX: Math.max(...bounds.map(({ maxX }) => maxX)) + surroundingsUm,
				maxY: Math.max(...bounds.map(({ maxY }) => maxY)) + surroundingsUm
			},
			mostPxPerUm
		);
		this.changed();
	}

	/** Brings a place on the die to the canvas's centre, near enough to see things there. */
	flyTo(xUm: number, yUm: number, leastPxPerUm = 0.4): void {
		this.#isFitted = false;
		const pxPerUm = Math.max(this.camera.pxPerUm, leastPxPerUm);
		this.camera = { ...this.camera, centreXUm: xUm, centreYUm: yUm, pxPerUm };
		this.changed();
	}

	setScale(pxPerUm: number): void {
		this.#isFitted = false;
		this.camera = { ...this.camera, pxPerUm };
		this.changed();
	}

	setVisibility(visibility: Visibility): void {
		this.visibility = visibility;
		const kept = this.selected.filter(({ list }) => !isPlaced(list) || visibility.lists[list]);
		if (kept.length < this.selection.size) this.selection = new Set(kept.map(keyOf));
		this.changed();
	}
}
