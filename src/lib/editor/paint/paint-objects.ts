import { formatQuantity } from '#lib/units/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import type { Block, Feed, Floorplan, Keepout } from '#lib/floorplan/index.ts';
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
const NAME_FONT = `600 11.5px ${FONT}`;
const FIGURE_FONT = `400 11.5px ${FONT}`;
/** Gauges are drawn where a footprint is at least this high, px. */
const GAUGE_LEAST_PX = 5;

/** A rectangle on the die as screen pixels: left, top, width, height. */
function screenRect(camera: Camera, { minX, minY, maxX, maxY }: Bounds) {
	const [left, top] = toScreen(camera, diePoint(minX, maxY));
	return [left, top, (maxX - minX) * camera.pxPerUm, (maxY - minY) * camera.pxPerUm] as const;
}

/** The outline of something selected is at least this large, px. */
const MARK_LEAST_PX = 10;
const SLIP_HEIGHT_PX = 16;
const SLIP_PADDING_PX = 4;
/** A name is cut short to no fewer letters than this. */
const NAME_LEAST_LETTERS = 4;

/**
 * The name, else what stands after its last point, else as much of that as fits; null where that
 * would say nothing.
 */
function shortened(context: CanvasRenderingContext2D, name: string, roomPx: number): string | null {
	const last = name.slice(name.lastIndexOf('.') + 1);
	for (const whole of [name, last]) {
		if (context.measureText(whole).width <= roomPx) return whole;
	}
	for (let letters = last.length - 1; letters >= NAME_LEAST_LETTERS; letters--) {
		const short = `${last.slice(0, letters)}…`;
		if (context.measureText(short).width <= roomPx) return short;
	}
	return null;
}

/**
 * A slip of paper with a name and a figure: readable over any colour of the map. What does not fit
 * into the width is left out, the figure first.
 */
function paintSlip(
	{ context, theme }: PaintContext,
	name: string,
	figure: string,
	box: readonly [left: number, top: number, width: number, height: number],
	camera: Camera
): void {
	const [left, top, width, height] = box;
	if (height < SLIP_HEIGHT_PX + 4) return;
	const room = width - 4;
	context.textAlign = 'left';
	context.textBaseline = 'middle';
	context.font = NAME_FONT;
	const text = shortened(context, name, room - 2 * SLIP_PADDING_PX);
	if (text === null) return;
	const nameWidth = context.measureText(text).width;
	context.font = FIGURE_FONT;
	const full = nameWidth + context.measureText(figure).width + 3 * SLIP_PADDING_PX;
	const hasFigure = full <= room;
	const slip = hasFigure ? full : nameWidth + 2 * SLIP_PADDING_PX;
	// Stays in sight while any of its block is.
	const x = Math.max(left, Math.min(0, left + width - slip));
	const y = Math.max(top, Math.min(0, top + height - SLIP_HEIGHT_PX));
	if (x > camera.widthPx || y > camera.heightPx) return;
	context.globalAlpha = 0.88;
	context.fillStyle = theme.paper;
	context.fillRect(x + 0.5, y + 0.5, slip, SLIP_HEIGHT_PX);
	context.globalAlpha = 1;
	const middle = y + SLIP_HEIGHT_PX / 2 + 1;
	context.font = NAME_FONT;
	context.fillStyle = theme.ink;
	context.fillText(text, x + SLIP_PADDING_PX, middle);
	if (!hasFigure) return;
	context.font = FIGURE_FONT;
	context.fillStyle = theme.inkSoft;
	context.fillText(figure, x + nameWidth + 2 * SLIP_PADDING_PX, middle);
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
	context.strokeStyle = theme.paper;
	context.globalAlpha = 0.4;
	context.lineWidth = 2.5;
	context.stroke();
	context.strokeStyle = theme.ink;
	context.globalAlpha = 0.85;
	context.lineWidth = 1;
	context.stroke();
	context.globalAlpha = 1;
	const amps = formatQuantity(block.amps[modeId] ?? 0, 'A', { digits: 3 });
	paintSlip(paint, block.name ?? block.id, amps, screenRect(camera, bounds), camera);
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

/** Radius of a bump's mark, px: about its true size, but never too small to see nor in the way. */
function feedRadiusPx({ pxPerUm }: Camera): number {
	return Math.min(9, Math.max(1.4, 20 * pxPerUm));
}

/** A bump: a ring for an input, a filled dot for ground. */
export function paintFeed(
	{ context, camera, theme }: PaintContext,
	feed: Feed,
	isGround: boolean
): void {
	const [x, y] = toScreen(camera, diePoint(feed.xUm, feed.yUm));
	const radius = feedRadiusPx(camera);
	context.beginPath();
	context.arc(x, y, radius, 0, 2 * Math.PI);
	// From afar they are a texture, not objects.
	context.globalAlpha = radius < 3 ? 0.45 : 0.8;
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

/** A regulator as it is drawn. */
export interface RegulatorPicture {
	readonly id: string;
	readonly bounds: Bounds;
	readonly isEnabled: boolean;
	readonly isFixed: boolean;
	/** What the result shown says of it; null where there is none. */
	readonly result: Pick<RegulatorResult, 'state' | 'loadFraction'> | null;
	/** Something speaks against its place. */
	readonly isIllegal: boolean;
}

/** The gauge reaches a little beyond the rating, so that the mark of the rating can be seen. */
const GAUGE_TOP = 1.12;
/** The id is written where the footprint is at least this wide, px. */
const ID_LEAST_PX = 76;

/**
 * A regulator: its footprint with a level gauge that rises with the current to a mark at the rating;
 * each state has an outline of its own, so that it shows without colour.
 */
export function paintRegulator(paint: PaintContext, picture: RegulatorPicture): void {
	const { context, camera, theme } = paint;
	const { result, isIllegal } = picture;
	const box = screenRect(camera, picture.bounds);
	const [left, top, width, height] = box;
	const state = picture.isEnabled ? (result?.state ?? null) : 'off';
	const isSmall = height < GAUGE_LEAST_PX;
	context.fillStyle = theme.sheet;
	context.fillRect(left, top, width, height);
	if (result && state !== 'off') {
		const level = Math.min(1, Math.max(0, result.loadFraction / GAUGE_TOP));
		context.fillStyle = state === 'limited' && isSmall ? theme.brass : theme.brassFill;
		context.fillRect(left, top + height * (1 - level), width, height * level);
	}
	context.strokeStyle = isIllegal ? theme.vermilion : theme.brass;
	context.lineWidth = isIllegal ? 2 : 1.2;
	if (state === 'idle') context.setLineDash(isSmall ? [2, 2] : [4, 3]);
	context.strokeRect(left, top, width, height);
	context.setLineDash([]);
	if (isIllegal) hatch(paint, box);
	if (isSmall) return;
	if (result && height >= 12) paintRating(paint, box);
	if (state !== null) paintState(paint, state, box);
	if (picture.isFixed) paintPin(paint, box);
	if (width >= ID_LEAST_PX && height >= 16) {
		context.font = `400 11px ${FONT}`;
		context.textAlign = 'center';
		context.textBaseline = 'middle';
		context.fillStyle = theme.ink;
		context.fillText(picture.id, left + width / 2, top + height / 2 + 1, width - 8);
	}
}

type Box = readonly [left: number, top: number, width: number, height: number];

/** Two short marks where the gauge stands at the rating. */
function paintRating({ context, theme }: PaintContext, [left, top, width, height]: Box): void {
	const y = top + height * (1 - 1 / GAUGE_TOP);
	const length = Math.min(6, width / 4);
	context.beginPath();
	context.moveTo(left, y);
	context.lineTo(left + length, y);
	context.moveTo(left + width - length, y);
	context.lineTo(left + width, y);
	context.strokeStyle = theme.ink;
	context.lineWidth = 1;
	context.stroke();
}

function paintState(
	{ context, theme }: PaintContext,
	state: RegulatorResult['state'],
	[left, top, width, height]: Box
): void {
	context.strokeStyle = theme.brass;
	context.fillStyle = theme.brass;
	context.lineWidth = 1.2;
	switch (state) {
		case 'limited':
			// Full to the brim: a second frame around the first.
			context.strokeRect(left - 3, top - 3, width + 6, height + 6);
			break;
		case 'dropout':
			// The pass device is fully on: an open wedge beneath.
			context.beginPath();
			context.moveTo(left + width / 2 - 5, top + height + 6);
			context.lineTo(left + width / 2, top + height);
			context.lineTo(left + width / 2 + 5, top + height + 6);
			context.closePath();
			context.fill();
			break;
		case 'off':
			context.beginPath();
			context.moveTo(left, top);
			context.lineTo(left + width, top + height);
			context.moveTo(left + width, top);
			context.lineTo(left, top + height);
			context.stroke();
			break;
		case 'idle':
		case 'regulating':
			break;
	}
}

/** A filled corner: the unit is fixed. */
function paintPin({ context, theme }: PaintContext, [left, top, , height]: Box): void {
	const side = Math.min(8, height / 2);
	context.beginPath();
	context.moveTo(left, top + height);
	context.lineTo(left + side, top + height);
	context.lineTo(left, top + height - side);
	context.closePath();
	context.fillStyle = theme.ink;
	context.fill();
}

/** Slanting lines: something is wrong with the place. */
function hatch({ context, theme }: PaintContext, [left, top, width, height]: Box): void {
	context.save();
	context.beginPath();
	context.rect(left, top, width, height);
	context.clip();
	context.beginPath();
	for (let x = left - height; x < left + width; x += 5) {
		context.moveTo(x, top + height);
		context.lineTo(x + height, top);
	}
	context.strokeStyle = theme.vermilion;
	context.lineWidth = 1;
	context.stroke();
	context.restore();
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
	if (isBroken) {
		// A second ring, so that a broken limit shows without colour.
		context.beginPath();
		context.arc(x, y, 12, 0, 2 * Math.PI);
		context.lineWidth = 1.25;
		context.stroke();
	}
	context.font = `600 11px ${FONT}`;
	context.textAlign = 'center';
	context.textBaseline = 'middle';
	context.fillStyle = theme.ink;
	context.fillText(String(number), x, y + 0.5);
}

/**
 * The outline of a selected or hovered thing: paper and ink, of which one stands out from
 * every colour of the map by 3:1; around a bump, which has no size, a ring.
 */
export function paintMarked(
	{ context, camera, theme }: PaintContext,
	bounds: Bounds,
	isSelected: boolean
): void {
	const [left, top, width, height] = screenRect(camera, bounds);
	const radius = feedRadiusPx(camera);
	const isPoint = width === 0 && height === 0;
	context.beginPath();
	if (isPoint) {
		context.arc(left, top, radius + 2.5, 0, 2 * Math.PI);
	} else {
		const growX = Math.max(3, (MARK_LEAST_PX - width) / 2);
		const growY = Math.max(3, (MARK_LEAST_PX - height) / 2);
		context.rect(left - growX, top - growY, width + 2 * growX, height + 2 * growY);
	}
	// Thinner around what is small, so that many marks do not run into each other.
	const isSmall = isPoint ? radius < 4 : Math.max(width, height) < 12;
	const lineWidth = isSelected ? (isSmall ? 1.4 : 2.25) : 1;
	context.strokeStyle = theme.paper;
	context.lineWidth = lineWidth + (isSmall ? 1.4 : 2.25);
	context.stroke();
	context.strokeStyle = theme.ink;
	context.lineWidth = lineWidth;
	context.stroke();
}

/** Cells of a document by id, for footprints. */
export function cellsById(floorplan: Floorplan): ReadonlyMap<string, Floorplan['cells'][number]> {
	return new Map(floorplan.cells.map((cell) => [cell.id, cell]));
}
