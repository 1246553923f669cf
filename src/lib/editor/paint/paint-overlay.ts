import type { Bounds } from '#lib/geometry/index.ts';
import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import { toScreen } from '../camera.ts';
import type { DragPreview, Ghost, Overlay } from '../overlay.ts';
import { diePoint, type DiePoint } from '../points.ts';
import { referenceOf, type ItemKey } from '../selection.ts';
import type { Guide } from '../snapping.ts';
import { cellsById, type PaintContext } from './paint-context.ts';
import { paintMarked } from './paint-marks.ts';
import { paintRegulator } from './paint-regulator.ts';
import { pictureOf } from './paint-scene.ts';

export interface OverlayPicture {
	readonly floorplan: Floorplan;
	readonly overlay: Overlay;
	readonly selection: ReadonlySet<ItemKey>;
	readonly hovered: ItemKey | null;
	readonly boundsOf: (key: ItemKey) => Bounds | undefined;
}

/** What a tool shows while it works: marks, dragged things at their new places, ghost, marquee. */
export function paintOverlay(paint: PaintContext, picture: OverlayPicture): void {
	const { overlay, selection, hovered, boundsOf } = picture;
	const { drag, ghost, marquee, probe } = overlay;
	if (hovered && !selection.has(hovered)) {
		const bounds = boundsOf(hovered);
		if (bounds) paintMarked(paint, bounds, false);
	}
	for (const key of selection) {
		const bounds = boundsOf(key);
		if (bounds && !drag?.keys.has(key)) paintMarked(paint, bounds, true);
	}
	if (drag) paintDrag(paint, picture, drag);
	if (ghost) paintGhost(paint, picture.floorplan, ghost);
	if (marquee) paintMarquee(paint, marquee);
	if (probe) paintProbe(paint, probe);
}

function paintDrag(
	paint: PaintContext,
	{ floorplan, boundsOf }: OverlayPicture,
	{ keys, dxUm, dyUm, reasons, guides }: DragPreview
): void {
	const cells = cellsById(floorplan);
	const byId = new Map(floorplan.regulators.map((regulator) => [regulator.id, regulator]));
	for (const key of keys) {
		const bounds = boundsOf(key);
		if (!bounds) continue;
		const { list, id } = referenceOf(key);
		const regulator = list === 'regulators' ? byId.get(id) : undefined;
		if (regulator) {
			const moved: Regulator = {
				...regulator,
				xUm: regulator.xUm + dxUm,
				yUm: regulator.yUm + dyUm
			};
			const picture = pictureOf(cells, moved, undefined, reasons.has(id));
			if (picture) paintRegulator(paint, picture);
		}
		const moved = {
			minX: bounds.minX + dxUm,
			minY: bounds.minY + dyUm,
			maxX: bounds.maxX + dxUm,
			maxY: bounds.maxY + dyUm
		};
		paintMarked(paint, moved, true);
	}
	for (const guide of guides) paintGuide(paint, guide);
}

/** A thin line with a tick at each end: edges or centres agree along it. */
function paintGuide({ context, camera, theme }: PaintContext, guide: Guide): void {
	const { axis, atUm, fromUm, toUm } = guide;
	const TICK_PX = 3;
	const isUpright = axis === 'x';
	const [x1, y1] = toScreen(camera, isUpright ? diePoint(atUm, fromUm) : diePoint(fromUm, atUm));
	const [x2, y2] = toScreen(camera, isUpright ? diePoint(atUm, toUm) : diePoint(toUm, atUm));
	const [tickX, tickY] = isUpright ? [TICK_PX, 0] : [0, TICK_PX];
	const trace = () => {
		context.beginPath();
		context.moveTo(x1, y1);
		context.lineTo(x2, y2);
		for (const [x, y] of [
			[x1, y1],
			[x2, y2]
		]) {
			context.moveTo(x - tickX, y - tickY);
			context.lineTo(x + tickX, y + tickY);
		}
		context.stroke();
	};
	context.strokeStyle = theme.paper;
	context.lineWidth = 3;
	trace();
	context.strokeStyle = theme.accent;
	context.lineWidth = 1;
	trace();
}

function paintGhost(paint: PaintContext, floorplan: Floorplan, ghost: Ghost): void {
	const { regulator, reasons } = ghost;
	const isIllegal = reasons.length > 0;
	const picture = pictureOf(cellsById(floorplan), regulator, undefined, isIllegal);
	if (!picture) return;
	paint.context.save();
	paint.context.globalAlpha = 0.85;
	paintRegulator(paint, picture);
	paint.context.restore();
	paintMarked(paint, picture.bounds, false);
}

function paintMarquee({ context, camera, theme }: PaintContext, marquee: Bounds): void {
	const [left, top] = toScreen(camera, diePoint(marquee.minX, marquee.maxY));
	const [right, bottom] = toScreen(camera, diePoint(marquee.maxX, marquee.minY));
	context.save();
	context.fillStyle = theme.accent;
	context.globalAlpha = 0.08;
	context.fillRect(left, top, right - left, bottom - top);
	context.globalAlpha = 1;
	context.strokeStyle = theme.paper;
	context.lineWidth = 3;
	context.strokeRect(left, top, right - left, bottom - top);
	context.strokeStyle = theme.accent;
	context.lineWidth = 1.25;
	context.setLineDash([5, 3]);
	context.strokeRect(left, top, right - left, bottom - top);
	context.restore();
}

/** Cross hairs with an open middle, so that what is read stays in sight. */
function paintProbe({ context, camera, theme }: PaintContext, place: DiePoint): void {
	const GAP_PX = 5;
	const ARM_PX = 16;
	const [x, y] = toScreen(camera, place);
	const trace = () => {
		context.beginPath();
		for (const [dx, dy] of [
			[1, 0],
			[-1, 0],
			[0, 1],
			[0, -1]
		]) {
			context.moveTo(x + dx * GAP_PX, y + dy * GAP_PX);
			context.lineTo(x + dx * ARM_PX, y + dy * ARM_PX);
		}
		context.stroke();
	};
	context.strokeStyle = theme.paper;
	context.lineWidth = 4;
	trace();
	context.strokeStyle = theme.ink;
	context.lineWidth = 1.5;
	trace();
}
