import { boundsOf, type Bounds } from '#lib/geometry/index.ts';
import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import {
	findItem,
	isPlaced,
	moveItems,
	type ApplyResult,
	type EditDraft,
	type ItemReference,
	type Operation,
	type PlacedList
} from '#lib/floorplan/edits/index.ts';
import type { PlacementReason } from '#lib/floorplan/legality/index.ts';
import { beside, fit, panBy, viewOf, zoomAt, type Camera } from './camera.ts';
import { explainFailure } from './explain.ts';
import { History, type StepOffer } from './history.ts';
import type { PointerInput } from './input.ts';
import { NudgeBurst, type Schedule } from './nudge-burst.ts';
import type { Overlay } from './overlay.ts';
import { PlacementJudge } from './placement-judge.ts';
import type { ScreenPoint } from './points.ts';
import { SceneIndex } from './scene-index.ts';
import { keyOf, referenceOf, type ItemKey } from './selection.ts';
import { nudgeStepUm } from './snapping.ts';
import { selecting } from './tools/select/index.ts';
import type { Direction, ToolHost, ToolState } from './tools/tool.ts';
import { everythingVisible, type Visibility } from './visibility.ts';

/** What the editor needs from whoever keeps the document. */
export interface DocumentKeeper {
	/** Applies an edit to the local document and sends it; the document has changed when this returns. */
	submit(draft: EditDraft): ApplyResult;
}

/** Something that was not done; a new object each time, so that the same words can be told twice. */
export interface Refusal {
	readonly message: string;
}

export interface EditorOptions {
	/** Whether the person may change blocks, modes, corners and limits; default: who may draw may. */
	readonly canEditLoads?: boolean;
	/** For the pause that ends a run of nudges; without it the next other action ends the run. */
	readonly schedule?: Schedule;
}

/** Steps of a nudge with Shift. */
export const LARGE_NUDGE = 10;
/** An arrow key moves the view this far where there is nothing to nudge, px. */
const PAN_STEP_PX = 60;
/** Most neighbours that snapping looks at. */
const MOST_NEIGHBOURS = 300;

type Listener = () => void;

/**
 * The editor without a screen: document, selection, camera, tools and history. Everything that can
 * be seen is in its fields; listeners hear that something changed and read what they need.
 */
export class Editor implements ToolHost {
	#floorplan: Floorplan;
	#keeper: DocumentKeeper;
	#scene: SceneIndex;
	#judge: PlacementJudge;
	#listeners = new Set<Listener>();
	#state: ToolState;
	#history = new History();
	#burst: NudgeBurst | null = null;
	readonly #schedule: Schedule;

	selection: ReadonlySet<ItemKey> = new Set();
	hovered: ItemKey | null = null;
	overlay: Overlay = {};
	visibility: Visibility;
	/** Whether the person may change the drawing. */
	canDraw: boolean;
	/** Whether the person may change blocks, modes, corners and limits. */
	canEditLoads: boolean;
	/** Why the last edit did not take effect; cleared by the next one that does. */
	refusal: Refusal | null = null;
	camera: Camera = { centreXUm: 0, centreYUm: 0, pxPerUm: 0.1, widthPx: 1, heightPx: 1 };
	/** The camera still follows the canvas's size: nobody has moved it yet. */
	#isFitted = true;
	#clearPx = 0;

	constructor(
		floorplan: Floorplan,
		keeper: DocumentKeeper,
		canDraw: boolean,
		options: EditorOptions = {}
	) {
		this.#floorplan = floorplan;
		this.#keeper = keeper;
		this.#scene = new SceneIndex(floorplan);
		this.#judge = new PlacementJudge(floorplan);
		this.canDraw = canDraw;
		this.canEditLoads = options.canEditLoads ?? canDraw;
		this.#schedule = options.schedule ?? (() => () => {});
		this.visibility = everythingVisible(floorplan);
		this.#state = selecting(this);
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
		return this.#burst ? 'Nudge' : this.#history.undoLabel;
	}

	get redoLabel(): string | null {
		return this.#history.redoLabel;
	}

	get selected(): ItemReference[] {
		return [...this.selection].map(referenceOf);
	}

	/** Reasons against the regulators that stand illegally, by id, in document order. */
	get problems(): ReadonlyMap<string, readonly PlacementReason[]> {
		return this.#judge.problems;
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
		this.#judge = new PlacementJudge(floorplan);
		const kept = [...this.selection].filter((key) => this.#exists(key));
		if (kept.length < this.selection.size) this.selection = new Set(kept);
		if (this.hovered && !this.#exists(this.hovered)) this.hovered = null;
		this.changed();
	}

	#exists(key: ItemKey): boolean {
		const { list, id } = referenceOf(key);
		return this.#floorplan[list].some((item) => item.id === id);
	}

	/** Makes an edit: one step of undo. Returns whether it took effect; why not stands in `refusal`. */
	execute(draft: EditDraft): boolean {
		this.endBurst();
		if (draft.operations.length === 0) return false;
		const inverse = this.#submit(draft);
		if (inverse) this.#history.record(draft.label, inverse);
		this.changed();
		return inverse !== null;
	}

	/** The operations that lead back, or null where the edit did not take effect. */
	#submit(draft: EditDraft): readonly Operation[] | null {
		const result = this.#keeper.submit(draft);
		this.refusal =
			result.status === 'applied'
				? null
				: { message: `${draft.label}: not done. ${explainFailure(result)}` };
		return result.status === 'applied' ? result.inverse : null;
	}

	/** Tells the person why something was not done. */
	refuse(message: string): void {
		this.refusal = { message };
		this.changed();
	}

	undo(): void {
		this.#take(() => this.#history.undo());
	}

	redo(): void {
		this.#take(() => this.#history.redo());
	}

	/** Takes a step of the history. One that no longer fits is given up, and the person is told. */
	#take(offer: () => StepOffer | null): void {
		if (this.#state.name.startsWith('select.')) this.#giveUp();
		this.endBurst();
		const step = offer();
		if (!step) return;
		const inverse = this.#submit(step.draft);
		if (inverse) step.taken(inverse);
		else step.dropped();
		this.changed();
	}

	/**
	 * Moves the selection by steps of the grid. A run of nudges is shown as it goes and becomes one
	 * edit when it ends: after a pause, or before anything else is done. False where nothing moves.
	 */
	nudge([x, y]: Direction, isLarge: boolean): boolean {
		const items = this.#burst?.items ?? this.selected.filter((item) => this.canMove(item));
		if (items.length === 0) return false;
		this.#burst ??= new NudgeBurst(items, this.#schedule, () => this.endBurst());
		const steps = isLarge ? LARGE_NUDGE : 1;
		const [stepX, stepY] = nudgeStepUm(this.#floorplan, items);
		this.#burst.add(x * steps * stepX, y * steps * stepY);
		const { dxUm, dyUm } = this.#burst;
		const reasons = this.reasonsAfterMove(items, dxUm, dyUm);
		this.showOverlay({
			drag: { keys: new Set(items.map(keyOf)), dxUm, dyUm, reasons, guides: [] }
		});
		return true;
	}

	/** Finishes a run of nudges, if there is one. */
	endBurst(): void {
		const burst = this.#burst;
		if (!burst) return;
		this.#burst = null;
		burst.end();
		this.overlay = {};
		this.execute(moveItems(this.#floorplan, burst.items, burst.dxUm, burst.dyUm));
		this.changed();
	}

	select(references: readonly ItemReference[], isAdding = false): void {
		this.endBurst();
		const keys = references.map(keyOf);
		const next = new Set(isAdding ? this.selection : []);
		for (const key of keys) {
			if (isAdding && this.selection.has(key)) next.delete(key);
			else next.add(key);
		}
		this.selection = next;
		this.changed();
	}

	isShown = (list: PlacedList): boolean => this.visibility.lists[list];

	/** Whether the person may change an item. */
	canEdit({ list }: ItemReference): boolean {
		const isLoad = list === 'blocks' || list === 'modes' || list === 'corners';
		return isLoad ? this.canEditLoads : this.canDraw;
	}

	/** Whether the person may move an item, and it is not fixed. */
	canMove(reference: ItemReference): boolean {
		if (!this.canEdit(reference) || !isPlaced(reference.list)) return false;
		if (reference.list !== 'regulators') return true;
		return !findItem(this.#floorplan, reference.list, reference.id)?.fixed;
	}

	reasonsAgainst(regulator: Regulator): PlacementReason[] {
		return this.#judge.reasonsAgainst(regulator);
	}

	neighbours(except: readonly ItemReference[]): Bounds[] {
		const left = new Set(except.map(keyOf));
		return this.#scene
			.boundsInView(viewOf(this.camera), this.isShown)
			.filter(({ key }) => !left.has(key))
			.slice(0, MOST_NEIGHBOURS);
	}

	/** Reasons against moving regulators by a distance, by id. */
	reasonsAfterMove(
		references: readonly ItemReference[],
		dxUm: number,
		dyUm: number
	): Map<string, PlacementReason[]> {
		return this.#judge.reasonsAfterMove(references, dxUm, dyUm);
	}

	// Tools.

	enter(state: ToolState): void {
		this.#state = state;
		this.changed();
	}

	/** The tool in use starts anew, whatever it was in the middle of; another takes its place. */
	startTool(make: (host: ToolHost) => ToolState): void {
		this.endBurst();
		this.#giveUp();
		this.hovered = null;
		this.enter(make(this));
	}

	leaveTool(): void {
		this.enter(selecting(this));
	}

	/** Ends a running gesture and tool without a trace. */
	#giveUp(): void {
		for (let most = 3; most > 0 && this.#state.cancel; most--) this.#state.cancel();
	}

	/** Whether something is going on that can be given up. */
	get isBusy(): boolean {
		return this.#state.cancel !== undefined;
	}

	/** The pointer has left the canvas. */
	pointerLeave(): void {
		if (this.hovered === null) return;
		this.hovered = null;
		this.changed();
	}

	pointerDown(input: PointerInput): void {
		this.endBurst();
		this.#state.pointerDown?.(input);
	}

	pointerMove(input: PointerInput): void {
		const before = this.#state;
		before.pointerMove?.(input);
		// A move that turns a press into a drag is the first move of the drag, too.
		if (this.#state !== before) this.#state.pointerMove?.(input);
	}

	pointerUp(input: PointerInput): void {
		this.#state.pointerUp?.(input);
	}

	/** An arrow key: for the tool, else a nudge of the selection, else the view moves. */
	arrow(direction: Direction, isLarge: boolean): void {
		if (this.#state.arrow) this.#state.arrow(direction, isLarge);
		else if (!this.nudge(direction, isLarge)) {
			this.pan(-direction[0] * PAN_STEP_PX, direction[1] * PAN_STEP_PX);
		}
	}

	/** Enter: for the tool, else it selects what the pointer is over. */
	confirm(): void {
		if (this.#state.confirm) this.#state.confirm();
		else if (this.hovered) this.select([referenceOf(this.hovered)]);
	}

	/** Gives up what the tool is doing; where it does nothing, the selection is cleared. */
	cancel(): void {
		this.endBurst();
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

	/** Keeps so much of the canvas's left clear of the whole die, px, as far as there is room. */
	keepClear(leftPx: number): void {
		this.#clearPx = leftPx;
		if (this.#isFitted) this.fitAll();
	}

	fitAll(): void {
		this.#isFitted = true;
		const bounds = boundsOf(this.#floorplan.die.outline);
		this.camera = beside(fit(this.camera, bounds), bounds, this.#clearPx);
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

	/** Brings an item into view where it is not wholly there already, without another scale. */
	reveal(key: ItemKey): void {
		const bounds = this.#scene.boundsOf(key);
		if (!bounds) return;
		const view = viewOf(this.camera);
		const isSeen =
			bounds.minX >= view.minX &&
			bounds.maxX <= view.maxX &&
			bounds.minY >= view.minY &&
			bounds.maxY <= view.maxY;
		if (isSeen) return;
		this.flyTo((bounds.minX + bounds.maxX) / 2, (bounds.minY + bounds.maxY) / 2, 0);
	}

	/** Brings a place on the die to the canvas's centre, near enough to see things there. */
	flyTo(xUm: number, yUm: number, leastPxPerUm = 0.4): void {
		this.#isFitted = false;
		const pxPerUm = Math.max(this.camera.pxPerUm, leastPxPerUm);
		this.camera = { ...this.camera, centreXUm: xUm, centreYUm: yUm, pxPerUm };
		this.changed();
	}

	/** Another scale about the middle of the view. */
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
