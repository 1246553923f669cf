import { FULL_SCALE_PX_PER_UM } from '../camera.ts';
import type { Editor } from '../editor.ts';
import { screenPoint } from '../points.ts';
import { probing } from '../tools/probe/probing.ts';
import type { Command } from './command.ts';

const ZOOM_STEP = 1.3;

const always = () => true;

function zoomCentre(editor: Editor, factor: number): void {
	const { widthPx, heightPx } = editor.camera;
	editor.zoom(screenPoint(widthPx / 2, heightPx / 2), factor);
}

export const viewCommands: readonly Command[] = [
	{
		id: 'fit',
		label: 'Show the whole die',
		group: 'view',
		keys: ['Shift+1'],
		permission: null,
		isEnabled: always,
		run: (editor) => editor.fitAll()
	},
	{
		id: 'fit-selection',
		label: 'Show the selection',
		group: 'view',
		keys: ['Shift+2', 'f'],
		permission: null,
		isEnabled: (editor) => editor.selection.size > 0,
		run: (editor) => editor.fitSelection()
	},
	{
		id: 'full-scale',
		label: 'One micrometre per pixel (100 %)',
		group: 'view',
		keys: ['Mod+0'],
		permission: null,
		isEnabled: always,
		run: (editor) => editor.setScale(FULL_SCALE_PX_PER_UM)
	},
	{
		id: 'zoom-in',
		label: 'Zoom in',
		group: 'view',
		keys: ['+', '='],
		permission: null,
		isEnabled: always,
		run: (editor) => zoomCentre(editor, ZOOM_STEP)
	},
	{
		id: 'zoom-out',
		label: 'Zoom out',
		group: 'view',
		keys: ['-'],
		permission: null,
		isEnabled: always,
		run: (editor) => zoomCentre(editor, 1 / ZOOM_STEP)
	},
	{
		id: 'probe',
		label: 'Read the map by arrow keys',
		group: 'view',
		keys: ['p'],
		permission: null,
		isEnabled: always,
		run(editor) {
			if (editor.state.name.startsWith('probe.')) editor.cancel();
			else editor.startTool(probing);
		}
	},
	{
		id: 'keys',
		label: 'Show all commands and keys',
		group: 'view',
		keys: ['?'],
		permission: null,
		isEnabled: (_editor, page) => page.showKeys !== undefined,
		run: (_editor, page) => page.showKeys?.()
	},
	{
		id: 'solve',
		label: 'Solve the mode and corner shown',
		group: 'solve',
		keys: ['Mod+Enter'],
		permission: 'solve.run',
		isEnabled: (_editor, page) => page.solve !== undefined,
		run: (_editor, page) => page.solve?.()
	}
];
