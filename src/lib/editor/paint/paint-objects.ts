import { formatQuantity } from '#lib/units/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import type { Block, Feed, Floorplan, Keepout, Regulator } from '#lib/floorplan/index.ts';
import type { RegulatorResult } from '#lib/results/index.ts';
import type { Camera } from '../camera.ts';
import { toScreen } from '../camera.ts';
import { diePoint } from '../points.ts';
import { traceOutline } from './paint-base.ts';
import type { PaintTheme } from './theme.ts';

export interface PaintContext {
	readonly context: CanvasRenderingContext2D;
	readonly camera: Camera;
	readonly theme: PaintTheme;
}

const FONT = '"Source Sans 3", sans-serif';
/** Names are written where a block is at least this wide, px. */
const NAME_LEAST_PX = 56;
/** Gauges are drawn where a footprint is at least this high, px. */
const GAUGE_LEAST_PX = 5;

/** A rectangle on the die as screen pixels: left, top, width, height. */
function screenRect(camera: Camera, { minX, minY, maxX, maxY }: Bounds) {
	const [left, top] = toScreen(camera, diePoint(minX, maxY));
	return [left, top, (maxX - minX) * camera.pxPerUm, (maxY - minY) * camera.pxPerUm] as const;
}

/** A text that stays readable over any colour of the map. */
function haloText(
	{ context, theme }: PaintContext,
	text: string,
	x: number,
	y: number,
	colour = theme.ink
): void {
	context.lineJoin = 'round';
	context.lineWidth = 3;
	context.strokeStyle = theme.sheet;
	context.strokeText(text, x, y);
	context.fillStyle = colour;
	context.fillText(text, x, y);
}

/** A block: outline, name, current in the mode. */
export function paintBlock(
	paint: PaintContext,
	block: Block,
	bounds: Bounds,
	modeId: string
): void {
	const { context, camera, theme } = paint;
	traceOutline(context, camera, block.outline);
	context.strokeStyle = theme.ink;
	context.globalAlpha = 0.75;
	context.lineWidth = 1;
	context.stroke();
	context.globalAlpha = 1;
	const [left, top, width, height] = screenRect(camera, bounds);
	if (width < NAME_LEAST_PX || height < 30) return;
	context.textAlign = 'left';
	context.textBaseline = 'top';
	context.font = `600 12px ${FONT}`;
	haloText(paint, block.name ?? block.id, left + 5, top + 4);
	context.font = `400 11px ${FONT}`;
	const amps = block.amps[modeId] ?? 0;
	haloText(paint, formatQuantity(amps, 'A', { digits: 3 }), left + 5, top + 18, theme.inkSoft);
}

/** A keep-out: hatched across the straps' directions. */
export function paintKeepout(
	{ context, camera, theme }: PaintContext,
	keepout: Keepout,
	bounds: Bounds
): void {
	const [left, top, width, height] = screenRect(camera, bounds);
	context.save();
	traceOutline(context, camera, keepout.outline);
	context.strokeStyle = theme.inkSoft;
	context.setLineDash([5, 3]);
	context.lineWidth = 1;
	context.stroke();
	context.clip();
	context.setLineDash([]);
	context.globalAlpha = 0.4;
	context.beginPath();
	for (let x = left - height; x < left + width; x += 6) {
		context.moveTo(x, top);
		context.lineTo(x + height, top + height);
	}
	context.stroke();
	context.restore();
}

/** A bump: a ring for an input, a filled dot for ground. */
export function paintFeed(
	{ context, camera, theme }: PaintContext,
	feed: Feed,
	isGround: boolean
): void {
	const [x, y] = toScreen(camera, diePoint(feed.xUm, feed.yUm));
	const radius = Math.min(9, Math.max(1.6, 22 * camera.pxPerUm));
	context.beginPath();
	context.arc(x, y, radius, 0, 2 * Math.PI);
	context.globalAlpha = 0.7;
	if (isGround) {
		context.fillStyle = theme.straps.ground;
		context.fill();
	} else {
		context.strokeStyle = theme.straps.input;
		context.lineWidth = Math.max(1, radius / 3);
		context.stroke();
	}
	context.globalAlpha = 1;
}

/**
 * A regulator: its footprint with a level gauge. The fill rises with the current, the top edge is the
 * rating; each state has an outline of its own.
 */
export function paintRegulator(
	paint: PaintContext,
	regulator: Pick<Regulator, 'enabled'>,
	bounds: Bounds,
	result: RegulatorResult | null,
	isIllegal: boolean
): void {
	const { context, camera, theme } = paint;
	const [left, top, width, height] = screenRect(camera, bounds);
	const state = regulator.enabled ? (result?.state ?? null) : 'off';
	context.fillStyle = theme.sheet;
	context.fillRect(left, top, width, height);
	if (result && state !== 'off') {
		const level = Math.min(1, Math.max(0, result.loadFraction));
		context.fillStyle = theme.brassFill;
		context.fillRect(left, top + height * (1 - level), width, height * level);
	}
	context.strokeStyle = isIllegal ? theme.vermilion : theme.brass;
	context.lineWidth = isIllegal ? 2 : 1.2;
	if (height < GAUGE_LEAST_PX) {
		context.strokeRect(left, top, width, height);
		return;
	}
	switch (state) {
		case 'limited':
			// Full to the brim: the rating mark is a bar.
			context.strokeRect(left, top, width, height);
			context.fillStyle = theme.brass;
			context.fillRect(left, top - 1, width, Math.max(2.5, height * 0.18));
			break;
		case 'dropout':
			// The pass device is fully on: an open notch underneath.
			context.strokeRect(left, top, width, height);
			context.beginPath();
			context.moveTo(left + width / 2 - 4, top + height + 5);
			context.lineTo(left + width / 2, top + height);
			context.lineTo(left + width / 2 + 4, top + height + 5);
			context.closePath();
			context.fillStyle = theme.brass;
			context.fill();
			break;
		case 'idle':
			context.setLineDash([3, 2]);
			context.strokeRect(left, top, width, height);
			context.setLineDash([]);
			break;
		case 'off':
			context.globalAlpha = 0.7;
			context.strokeRect(left, top, width, height);
			context.beginPath();
			context.moveTo(left, top);
			context.lineTo(left + width, top + height);
			context.moveTo(left + width, top);
			context.lineTo(left, top + height);
			context.stroke();
			context.globalAlpha = 1;
			break;
		case 'regulating':
		case null:
			context.strokeRect(left, top, width, height);
	}
}

/** A numbered mark at a worst spot. */
export function paintSpot(
	paint: PaintContext,
	number: number,
	xUm: number,
	yUm: number,
	isBroken: boolean
): void {
	const { context, camera, theme } = paint;
	const [x, y] = toScreen(camera, diePoint(xUm, yUm));
	context.beginPath();
	context.arc(x, y, 8.5, 0, 2 * Math.PI);
	context.fillStyle = theme.paper;
	context.fill();
	context.strokeStyle = isBroken ? theme.vermilion : theme.ink;
	context.lineWidth = isBroken ? 2.5 : 1.25;
	context.stroke();
	context.font = `600 11px ${FONT}`;
	context.textAlign = 'center';
	context.textBaseline = 'middle';
	context.fillStyle = theme.ink;
	context.fillText(String(number), x, y + 0.5);
}

/** The outline of a selected or hovered thing: a double line that shows over any colour. */
export function paintMarked(
	{ context, camera, theme }: PaintContext,
	bounds: Bounds,
	isSelected: boolean
): void {
	const LEAST_PX = 10;
	let [left, top, width, height] = screenRect(camera, bounds);
	const growX = Math.max(3, (LEAST_PX - width) / 2);
	const growY = Math.max(3, (LEAST_PX - height) / 2);
	left -= growX;
	top -= growY;
	width += 2 * growX;
	height += 2 * growY;
	context.strokeStyle = theme.paper;
	context.lineWidth = isSelected ? 4.5 : 3;
	context.strokeRect(left, top, width, height);
	context.strokeStyle = theme.accent;
	context.lineWidth = isSelected ? 2 : 1;
	context.strokeRect(left, top, width, height);
}

/** Cells of a document by id, for footprints. */
export function cellsById(floorplan: Floorplan): ReadonlyMap<string, Floorplan['cells'][number]> {
	return new Map(floorplan.cells.map((cell) => [cell.id, cell]));
}
