import { moveItems, duplicateItems, removeItems, changeField } from '#lib/floorplan/edits/index.ts';
import { composeOrientations, type Orientation } from '#lib/geometry/index.ts';
import { FULL_SCALE_PX_PER_UM } from '../camera.ts';
import type { Editor } from '../editor.ts';
import { screenPoint } from '../points.ts';
import { referenceOf } from '../selection.ts';
import { nudgeStepUm } from '../snapping.ts';

/** Something a person can ask for: toolbar, keys and help read the same list. */
export interface Command {
	readonly id: string;
	readonly label: string;
	readonly group: 'edit' | 'select' | 'arrange' | 'view';
	/** Keys as `Mod+Shift+KeyName`; Mod is Ctrl, or Cmd on a Mac. Keys without Mod act on the canvas only. */
	readonly keys: readonly string[];
	/** Whether it changes the drawing, and so needs the right to. */
	readonly isDrawing: boolean;
	isEnabled(editor: Editor): boolean;
	run(editor: Editor): void;
}

const ZOOM_STEP = 1.3;
const LARGE_NUDGE = 10;
/** Where a duplicate stands from its original, um, where there are no sites. */
const DUPLICATE_OFFSET_UM = 20;

const hasSelection = (editor: Editor) => editor.selection.size > 0;
const hasRegulators = (editor: Editor) => editor.selected.some(({ list }) => list === 'regulators');
const always = () => true;

function zoomCentre(editor: Editor, factor: number): void {
	const { widthPx, heightPx } = editor.camera;
	editor.zoom(screenPoint(widthPx / 2, heightPx / 2), factor);
}

function nudge(
	name: string,
	arrow: string,
	x: -1 | 0 | 1,
	y: -1 | 0 | 1,
	isLarge: boolean
): Command {
	const steps = isLarge ? LARGE_NUDGE : 1;
	return {
		id: `nudge-${name}${isLarge ? '-far' : ''}`,
		label: `Nudge ${name}${isLarge ? ` by ${LARGE_NUDGE} steps` : ''}`,
		group: 'arrange',
		keys: [isLarge ? `Shift+${arrow}` : arrow],
		isDrawing: true,
		isEnabled: hasSelection,
		run(editor) {
			const [stepX, stepY] = nudgeStepUm(editor.floorplan, editor.selected);
			const draft = moveItems(
				editor.floorplan,
				editor.selected,
				x * steps * stepX,
				y * steps * stepY
			);
			editor.execute(draft, 'nudge');
		}
	};
}

function turn(id: string, label: string, keys: string[], by: Orientation): Command {
	return {
		id,
		label,
		group: 'arrange',
		keys,
		isDrawing: true,
		isEnabled: hasRegulators,
		run(editor) {
			const operations = editor.selected.flatMap(({ list, id: item }) => {
				const regulator = editor.floorplan.regulators.find((one) => one.id === item);
				if (list !== 'regulators' || !regulator || regulator.fixed) return [];
				const orient = composeOrientations(regulator.orient, by);
				return changeField(editor.floorplan, 'regulators', [item], 'orient', orient).operations;
			});
			editor.execute({ label, operations });
		}
	};
}

/** Moves the selection to the next or previous item of the list that holds it. */
function step(editor: Editor, by: 1 | -1): void {
	const present = editor.selected[0] ?? { list: 'regulators' as const, id: '' };
	const items = editor.floorplan[present.list];
	if (items.length === 0) return;
	const at = items.findIndex(({ id }) => id === present.id);
	const next = items[at === -1 ? 0 : (at + by + items.length) % items.length];
	editor.select([{ list: present.list, id: next.id }]);
}

export const commands: readonly Command[] = [
	{
		id: 'undo',
		label: 'Undo',
		group: 'edit',
		keys: ['Mod+z'],
		isDrawing: false,
		isEnabled: (editor) => editor.undoLabel !== null,
		run: (editor) => editor.undo()
	},
	{
		id: 'redo',
		label: 'Redo',
		group: 'edit',
		keys: ['Mod+Shift+z', 'Mod+y'],
		isDrawing: false,
		isEnabled: (editor) => editor.redoLabel !== null,
		run: (editor) => editor.redo()
	},
	{
		id: 'duplicate',
		label: 'Duplicate',
		group: 'edit',
		keys: ['Mod+d'],
		isDrawing: true,
		isEnabled: hasSelection,
		run(editor) {
			const [stepX, stepY] = nudgeStepUm(editor.floorplan, editor.selected);
			const whole = (stepUm: number) => Math.ceil(DUPLICATE_OFFSET_UM / stepUm) * stepUm;
			const draft = duplicateItems(editor.floorplan, editor.selected, whole(stepX), -whole(stepY));
			if (editor.execute(draft)) editor.select(draft.copies);
		}
	},
	{
		id: 'delete',
		label: 'Delete',
		group: 'edit',
		keys: ['Delete', 'Backspace'],
		isDrawing: true,
		isEnabled: hasSelection,
		run: (editor) => void editor.execute(removeItems(editor.floorplan, editor.selected))
	},
	{
		id: 'toggle-enabled',
		label: 'Switch regulators on or off',
		group: 'edit',
		keys: ['e'],
		isDrawing: true,
		isEnabled: hasRegulators,
		run(editor) {
			const ids = editor.selected.flatMap(({ list, id }) => (list === 'regulators' ? [id] : []));
			const isAnyOn = editor.floorplan.regulators.some(
				({ id, enabled }) => enabled && ids.includes(id)
			);
			editor.execute(changeField(editor.floorplan, 'regulators', ids, 'enabled', !isAnyOn));
		}
	},
	{
		id: 'select-all',
		label: 'Select all regulators',
		group: 'select',
		keys: ['Mod+a'],
		isDrawing: false,
		isEnabled: (editor) => editor.isShown('regulators'),
		run: (editor) =>
			editor.select(editor.floorplan.regulators.map(({ id }) => ({ list: 'regulators', id })))
	},
	{
		id: 'cancel',
		label: 'Give up the gesture, or clear the selection',
		group: 'select',
		keys: ['Escape'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => editor.cancel()
	},
	{
		id: 'next',
		label: 'Select the next item',
		group: 'select',
		keys: ['n'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => step(editor, 1)
	},
	{
		id: 'previous',
		label: 'Select the previous item',
		group: 'select',
		keys: ['p'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => step(editor, -1)
	},
	{
		id: 'select-hovered',
		label: 'Select what is under the pointer',
		group: 'select',
		keys: ['Enter'],
		isDrawing: false,
		isEnabled: (editor) => editor.hovered !== null,
		run: (editor) => editor.hovered && editor.select([referenceOf(editor.hovered)])
	},
	turn('rotate', 'Turn by 90°', ['r'], 'R90'),
	turn('mirror', 'Mirror left to right', ['m'], 'MY'),
	...[false, true].flatMap((isLarge) => [
		nudge('left', 'ArrowLeft', -1, 0, isLarge),
		nudge('right', 'ArrowRight', 1, 0, isLarge),
		nudge('up', 'ArrowUp', 0, 1, isLarge),
		nudge('down', 'ArrowDown', 0, -1, isLarge)
	]),
	{
		id: 'fit',
		label: 'Show the whole die',
		group: 'view',
		keys: ['Shift+1'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => editor.fitAll()
	},
	{
		id: 'fit-selection',
		label: 'Show the selection',
		group: 'view',
		keys: ['Shift+2', 'f'],
		isDrawing: false,
		isEnabled: hasSelection,
		run: (editor) => editor.fitSelection()
	},
	{
		id: 'full-scale',
		label: 'One micrometre per pixel',
		group: 'view',
		keys: ['Mod+0'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => editor.setScale(FULL_SCALE_PX_PER_UM)
	},
	{
		id: 'zoom-in',
		label: 'Zoom in',
		group: 'view',
		keys: ['+', '='],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => zoomCentre(editor, ZOOM_STEP)
	},
	{
		id: 'zoom-out',
		label: 'Zoom out',
		group: 'view',
		keys: ['-'],
		isDrawing: false,
		isEnabled: always,
		run: (editor) => zoomCentre(editor, 1 / ZOOM_STEP)
	}
];

/** Whether a command can be run now. */
export function isAvailable(command: Command, editor: Editor): boolean {
	return (editor.canDraw || !command.isDrawing) && command.isEnabled(editor);
}
