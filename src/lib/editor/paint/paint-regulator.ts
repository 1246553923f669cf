import type { Bounds } from '#lib/geometry/index.ts';
import type { RegulatorResult } from '#lib/results/index.ts';
import { FONT, screenRect, type Box, type PaintContext } from './paint-context.ts';

/** Gauges are drawn where a footprint is at least this high, px. */
const GAUGE_LEAST_PX = 5;

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
