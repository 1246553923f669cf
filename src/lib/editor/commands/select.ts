import { PLACED_LISTS, isPlaced } from '#lib/floorplan/edits/index.ts';
import type { Editor } from '../editor.ts';
import { keyOf } from '../selection.ts';
import type { Command } from './command.ts';

const always = () => true;

/** Selects the next or previous item of the kind that is selected, and shows it. */
function step(editor: Editor, by: 1 | -1): void {
	const present = editor.selected.at(-1);
	const list =
		present?.list ??
		PLACED_LISTS.find((one) => editor.isShown(one) && editor.floorplan[one].length > 0);
	if (!list || (isPlaced(list) && !editor.isShown(list))) return;
	const items = editor.floorplan[list];
	const at = items.findIndex(({ id }) => id === present?.id);
	const start = by === 1 ? 0 : items.length - 1;
	const { id } = items[at === -1 ? start : (at + by + items.length) % items.length];
	editor.select([{ list, id }]);
	editor.reveal(keyOf({ list, id }));
}

/** Goes on to the first item of the next kind: regulators, bumps, blocks, keep-outs. */
function stepKind(editor: Editor): void {
	const kinds = PLACED_LISTS.filter(
		(list) => editor.isShown(list) && editor.floorplan[list].length > 0
	);
	if (kinds.length === 0) return;
	const present = kinds.findIndex((list) => list === editor.selected.at(-1)?.list);
	const list = kinds[(present + 1) % kinds.length];
	const { id } = editor.floorplan[list][0];
	editor.select([{ list, id }]);
	editor.reveal(keyOf({ list, id }));
}

export const selectCommands: readonly Command[] = [
	{
		id: 'select-all',
		label: 'Select all that is shown',
		group: 'select',
		keys: ['Mod+a'],
		permission: null,
		isEnabled: always,
		run: (editor) =>
			editor.select(
				PLACED_LISTS.filter(editor.isShown).flatMap((list) =>
					editor.floorplan[list].map(({ id }) => ({ list, id }))
				)
			)
	},
	{
		id: 'select-regulators',
		label: 'Select all regulators',
		group: 'select',
		keys: ['Shift+a'],
		permission: null,
		isEnabled: (editor) => editor.isShown('regulators'),
		run: (editor) =>
			editor.select(editor.floorplan.regulators.map(({ id }) => ({ list: 'regulators', id })))
	},
	{
		id: 'cancel',
		label: 'Give up the gesture or tool, or clear the selection',
		group: 'select',
		keys: ['Escape'],
		permission: null,
		isEnabled: always,
		run: (editor) => editor.cancel()
	},
	{
		id: 'next',
		label: 'Select the next item of its kind',
		group: 'select',
		keys: ['n'],
		permission: null,
		isEnabled: always,
		run: (editor) => step(editor, 1)
	},
	{
		id: 'previous',
		label: 'Select the previous item of its kind',
		group: 'select',
		keys: ['Shift+n'],
		permission: null,
		isEnabled: always,
		run: (editor) => step(editor, -1)
	},
	{
		id: 'next-kind',
		label: 'Select the first item of the next kind',
		group: 'select',
		keys: ['k'],
		permission: null,
		isEnabled: always,
		run: stepKind
	},
	{
		id: 'confirm',
		label: 'Place the ghost, or select what is under the pointer',
		group: 'select',
		keys: ['Enter'],
		permission: null,
		isEnabled: always,
		run: (editor) => editor.confirm()
	}
];
