import { createSubscriber } from 'svelte/reactivity';
import type { Editor } from './editor.ts';

/**
 * The editor for components: reading a field makes the reader follow the editor. The editor itself
 * stays plain; Svelte merges a burst of changes into one update, also in a hidden tab, where
 * animation frames stop.
 */
export class EditorState {
	/** For changes; what is read through it is not followed. */
	readonly editor: Editor;
	readonly #follow: () => void;

	constructor(editor: Editor) {
		this.editor = editor;
		this.#follow = createSubscriber((update) => editor.subscribe(update));
	}

	get floorplan() {
		this.#follow();
		return this.editor.floorplan;
	}

	get selection() {
		this.#follow();
		return this.editor.selection;
	}

	get selected() {
		this.#follow();
		return this.editor.selected;
	}

	get hovered() {
		this.#follow();
		return this.editor.hovered;
	}

	get overlay() {
		this.#follow();
		return this.editor.overlay;
	}

	get camera() {
		this.#follow();
		return this.editor.camera;
	}

	get visibility() {
		this.#follow();
		return this.editor.visibility;
	}

	get refusal() {
		this.#follow();
		return this.editor.refusal;
	}

	get stateName() {
		this.#follow();
		return this.editor.state.name;
	}

	get undoLabel() {
		this.#follow();
		return this.editor.undoLabel;
	}

	get redoLabel() {
		this.#follow();
		return this.editor.redoLabel;
	}
}
