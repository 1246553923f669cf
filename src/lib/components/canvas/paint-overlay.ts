import { footprintOf } from '#lib/floorplan/legality/index.ts';
import { toScreen, diePoint, type Editor } from '#lib/editor/index.ts';
import {
	cellsById,
	paintMarked,
	paintRegulator,
	type PaintContext
} from '#lib/editor/paint/index.ts';

/** What a tool shows while it works: marks, dragged things at their new places, ghost, marquee. */
export function paintOverlay(paint: PaintContext, editor: Editor): void {
	const { context, camera, theme } = paint;
	const { drag, ghost, marquee } = editor.overlay;
	if (editor.hovered && !editor.selection.has(editor.hovered)) {
		const bounds = editor.scene.boundsOf(editor.hovered);
		if (bounds) paintMarked(paint, bounds, false);
	}
	for (const key of editor.selection) {
		const bounds = editor.scene.boundsOf(key);
		if (!bounds) continue;
		const isMoving = drag?.keys.has(key) ?? false;
		if (!drag || !isMoving) {
			paintMarked(paint, bounds, true);
			continue;
		}
		const moved = {
			minX: bounds.minX + drag.dxUm,
			minY: bounds.minY + drag.dyUm,
			maxX: bounds.maxX + drag.dxUm,
			maxY: bounds.maxY + drag.dyUm
		};
		const id = key.slice(key.indexOf(':') + 1);
		const isIllegal = drag.reasons.has(id);
		if (key.startsWith('regulators:'))
			paintRegulator(paint, { enabled: true }, moved, null, isIllegal);
		paintMarked(paint, moved, true);
	}
	if (ghost) {
		const bounds = footprintOf(cellsById(editor.floorplan), ghost.regulator);
		if (bounds) {
			context.globalAlpha = 0.8;
			paintRegulator(paint, { enabled: true }, bounds, null, ghost.reasons.length > 0);
			context.globalAlpha = 1;
		}
	}
	if (marquee) {
		const [left, top] = toScreen(camera, diePoint(marquee.minX, marquee.maxY));
		const [right, bottom] = toScreen(camera, diePoint(marquee.maxX, marquee.minY));
		context.strokeStyle = theme.accent;
		context.lineWidth = 1;
		context.setLineDash([4, 3]);
		context.strokeRect(left, top, right - left, bottom - top);
		context.setLineDash([]);
		context.globalAlpha = 0.08;
		context.fillStyle = theme.accent;
		context.fillRect(left, top, right - left, bottom - top);
		context.globalAlpha = 1;
	}
}
