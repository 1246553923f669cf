import { createSubscriber } from 'svelte/reactivity';
import type { Editor } from './editor.ts';

/**
 * The editor for components: reading a field makes the reader follow that field. The editor itself
 * stays plain and never becomes deep reactive state. Svelte merges a burst of changes into one
 * update, also in a hidden tab, where animation frames stop; a reader runs again only when its own
 * field is another value, so that a moving pointer does not repaint the straps.
 */
export class EditorState {
	/** For changes; what is read through it is not followed. */
	readonly editor: Editor;
	readonly #follow: () => void;

	constructor(editor: Editor) {
		this.editor = editor;
		this.#follow = createSubscriber((update) => editor.subscribe(update));
	}

	#read<T>(read: (editor: Editor) => T): T {
		this.#follow();
		return read(this.editor);
	}

	readonly floorplan = $derived.by(() => this.#read(({ floorplan }) => floorplan));
	readonly selection = $derived.by(() => this.#read(({ selection }) => selection));
	readonly selected = $derived.by(() => {
		void this.selection;
		return this.editor.selected;
	});
	readonly hovered = $derived.by(() => this.#read(({ hovered }) => hovered));
	readonly overlay = $derived.by(() => this.#read(({ overlay }) => overlay));
	readonly camera = $derived.by(() => this.#read(({ camera }) => camera));
	readonly visibility = $derived.by(() => this.#read(({ visibility }) => visibility));
	readonly refusal = $derived.by(() => this.#read(({ refusal }) => refusal));
	readonly stateName = $derived.by(() => this.#read(({ state }) => state.name));
	readonly undoLabel = $derived.by(() => this.#read(({ undoLabel }) => undoLabel));
	readonly redoLabel = $derived.by(() => this.#read(({ redoLabel }) => redoLabel));
	/** Reasons against regulators that stand illegally, by id. */
	readonly problems = $derived.by(() => {
		void this.floorplan;
		return this.editor.problems;
	});
}
