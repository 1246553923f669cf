import { changeField, removeItems } from '#lib/floorplan/edits/index.ts';
import { composeOrientations, type Orientation } from '#lib/geometry/index.ts';
import type { Editor } from '../editor.ts';
import type { Command } from './command.ts';
import { duplicate } from './duplicate.ts';

const hasSelection = (editor: Editor) => editor.selection.size > 0;

function selectedRegulators(editor: Editor) {
	const ids = new Set(
		editor.selected.flatMap(({ list, id }) => (list === 'regulators' ? [id] : []))
	);
	return editor.floorplan.regulators.filter(({ id }) => ids.has(id));
}

const hasRegulators = (editor: Editor) => editor.selected.some(({ list }) => list === 'regulators');

/** Switches a flag of the selected regulators: on where any is off. */
function flag(
	field: 'enabled' | 'fixed',
	parts: Pick<Command, 'id' | 'label' | 'group' | 'keys'>
): Command {
	return {
		...parts,
		permission: 'selection',
		isEnabled: hasRegulators,
		run(editor) {
			const regulators = selectedRegulators(editor);
			const isOn = regulators.every((regulator) => regulator[field]);
			const ids = regulators.map(({ id }) => id);
			editor.execute(changeField(editor.floorplan, 'regulators', ids, field, !isOn));
		}
	};
}

/** Turns every selected regulator that is not fixed about its own footprint. */
function turn(id: string, label: string, keys: string[], by: Orientation): Command {
	return {
		id,
		label,
		group: 'arrange',
		keys,
		permission: 'selection',
		isEnabled: hasRegulators,
		run(editor) {
			const operations = selectedRegulators(editor)
				.filter(({ fixed }) => !fixed)
				.flatMap((regulator) => {
					const orient = composeOrientations(regulator.orient, by);
					return changeField(editor.floorplan, 'regulators', [regulator.id], 'orient', orient)
						.operations;
				});
			editor.execute({ label, operations });
		}
	};
}

export const editCommands: readonly Command[] = [
	{
		id: 'undo',
		label: 'Undo',
		group: 'edit',
		keys: ['Mod+z'],
		permission: null,
		isEnabled: (editor) => editor.undoLabel !== null,
		run: (editor) => editor.undo()
	},
	{
		id: 'redo',
		label: 'Redo',
		group: 'edit',
		keys: ['Mod+Shift+z', 'Mod+y'],
		permission: null,
		isEnabled: (editor) => editor.redoLabel !== null,
		run: (editor) => editor.redo()
	},
	{
		id: 'place',
		label: 'Add regulators',
		group: 'edit',
		keys: ['a'],
		permission: 'floorplan.draw',
		isEnabled: ({ floorplan }, page) => page.place !== undefined && floorplan.cells.length > 0,
		run: (_editor, page) => page.place?.()
	},
	{
		id: 'duplicate',
		label: 'Duplicate',
		group: 'edit',
		keys: ['Mod+d'],
		permission: 'selection',
		isEnabled: hasSelection,
		run: duplicate
	},
	{
		id: 'delete',
		label: 'Delete',
		group: 'edit',
		keys: ['Delete', 'Backspace'],
		permission: 'selection',
		isEnabled: hasSelection,
		run(editor) {
			const draft = removeItems(editor.floorplan, editor.selected);
			if (draft.operations.length > 0) editor.execute(draft);
			else editor.refuse('Nothing deleted: what is selected is fixed. Release it first.');
		}
	},
	flag('enabled', {
		id: 'toggle-enabled',
		label: 'Switch regulators on or off',
		group: 'edit',
		keys: ['e']
	}),
	flag('fixed', {
		id: 'toggle-fixed',
		label: 'Fix or release regulators',
		group: 'edit',
		keys: ['l']
	}),
	turn('rotate', 'Turn by 90°', ['r'], 'R90'),
	turn('mirror', 'Mirror left to right', ['m'], 'MY'),
	turn('mirror-upright', 'Mirror upside down', ['Shift+m'], 'MX')
];
