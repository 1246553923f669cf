import type { Bounds } from '#lib/geometry/index.ts';
import { toScreen } from '../camera.ts';
import { diePoint } from '../points.ts';
import { feedRadiusPx, FONT, screenRect, type PaintContext } from './paint-context.ts';

/** The outline of something selected is at least this large, px. */
const MARK_LEAST_PX = 10;

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
