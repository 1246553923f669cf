import { formatQuantity } from '#lib/units/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import type { Block, Feed, Keepout } from '#lib/floorplan/index.ts';
import { toScreen, type Camera } from '../camera.ts';
import { diePoint } from '../points.ts';
import { traceOutline } from './paint-base.ts';
import { feedRadiusPx, FONT, screenRect, type Box, type PaintContext } from './paint-context.ts';

const NAME_FONT = `600 11.5px ${FONT}`;
const FIGURE_FONT = `400 11.5px ${FONT}`;

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
	box: Box,
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
