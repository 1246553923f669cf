import { addItems, freeId } from '#lib/floorplan/edits/index.ts';
import type { Regulator } from '#lib/floorplan/index.ts';
import { checkPlacement, snapToSite } from '#lib/floorplan/legality/index.ts';
import { orientedSize } from '#lib/geometry/index.ts';
import { toDie } from '../../camera.ts';
import type { Editor } from '../../editor.ts';
import type { PointerInput, ToolState } from '../../input.ts';
import { idle } from '../select/idle.ts';

/** What the next regulators are: everything but their place and id. */
export type RegulatorTemplate = Pick<Regulator, 'cell' | 'input' | 'output' | 'orient'>;

/**
 * A ghost of a new regulator follows the pointer, on sites, with what speaks against the place.
 * Each click places one; Escape ends.
 */
export function placing(editor: Editor, template: RegulatorTemplate): ToolState {
	const at = ({ point, isFree }: PointerInput): Regulator => {
		const cell = editor.floorplan.cells.find(({ id }) => id === template.cell);
		const [width, height] = orientedSize(cell?.widthUm ?? 0, cell?.heightUm ?? 0, template.orient);
		const [xUm, yUm] = toDie(editor.camera, point);
		// The pointer holds the ghost by its middle.
		const corner = [xUm - width / 2, yUm - height / 2] as const;
		const [x, y] = isFree
			? corner.map((um) => Math.round(um * 1000) / 1000)
			: snapToSite(editor.floorplan, ...corner);
		const taken = new Set(editor.floorplan.regulators.map(({ id }) => id));
		return {
			...template,
			id: freeId(taken, `${template.output}_1`),
			xUm: x,
			yUm: y,
			enabled: true,
			fixed: false,
			offsetV: 0
		};
	};
	return {
		name: 'place.placing',
		pointerMove(input) {
			const regulator = at(input);
			const reasons = checkPlacement(editor.placements, regulator);
			editor.showOverlay({ ghost: { regulator, reasons } });
		},
		pointerUp(input) {
			const regulator = at(input);
			if (editor.execute(addItems(editor.floorplan, 'regulators', [regulator]))) {
				editor.select([{ list: 'regulators', id: regulator.id }]);
			}
		},
		cancel() {
			editor.overlay = {};
			editor.enter(idle(editor));
		}
	};
}
