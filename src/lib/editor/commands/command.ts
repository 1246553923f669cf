import type { Editor } from '../editor.ts';

/** What commands ask of the page around the editor. */
export interface PageActions {
	/** Asks for a solve of the mode and corner shown. */
	solve?(): void;
	/** Begins to place regulators of the cell that the page has chosen. */
	place?(): void;
	/** Shows the list of commands and keys. */
	showKeys?(): void;
}

/**
 * The right that a command needs, by its name in the role table; `selection` stands for the right
 * to change everything that is selected.
 */
export type CommandPermission = 'floorplan.draw' | 'solve.run' | 'selection';

/** Something a person can ask for: toolbar, keys and help read the same list. */
export interface Command {
	readonly id: string;
	readonly label: string;
	readonly group: 'edit' | 'select' | 'arrange' | 'view' | 'solve';
	/** Keys as `Mod+Shift+KeyName`; Mod is Ctrl, or Cmd on a Mac. All act only while the canvas has the focus. */
	readonly keys: readonly string[];
	readonly permission: CommandPermission | null;
	isEnabled(editor: Editor, page: PageActions): boolean;
	run(editor: Editor, page: PageActions): void;
}

function isPermitted({ permission }: Command, editor: Editor): boolean {
	switch (permission) {
		case null:
		case 'solve.run':
			// The page offers the action only to those who may.
			return true;
		case 'floorplan.draw':
			return editor.canDraw;
		case 'selection':
			return editor.selected.every((item) => editor.canEdit(item));
	}
}

/** Whether a command can be run now. */
export function isAvailable(command: Command, editor: Editor, page: PageActions = {}): boolean {
	return isPermitted(command, editor) && command.isEnabled(editor, page);
}
