import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Camera } from '../camera.ts';
import { toScreen, viewOf } from '../camera.ts';
import { diePoint } from '../points.ts';
import type { Visibility } from '../visibility.ts';
import type { StrapLines } from './strap-lines.ts';
import type { PaintTheme } from './theme.ts';

/** Sites are drawn once they are this far apart, px. */
const SITE_LEAST_PX = 9;
/** Straps nearer to each other than this are thinned out, px. */
const STRAP_LEAST_PX = 5;
/** Lines nearer to each other than this are fainter, px. */
const STRAP_FAINT_PX = 14;

/** Traces a closed outline in screen pixels. */
export function traceOutline(
	context: CanvasRenderingContext2D,
	camera: Camera,
	outline: readonly (readonly [number, number])[]
): void {
	context.beginPath();
	outline.forEach(([x, y], i) => {
		const [px, py] = toScreen(camera, diePoint(x, y));
		if (i === 0) context.moveTo(px, py);
		else context.lineTo(px, py);
	});
	context.closePath();
}

/** The die as a warm sheet, and the sites where they can be told apart. */
export function paintSheet(
	context: CanvasRenderingContext2D,
	{ floorplan, camera, theme }: { floorplan: Floorplan; camera: Camera; theme: PaintTheme }
): void {
	traceOutline(context, camera, floorplan.die.outline);
	context.fillStyle = theme.sheet;
	context.fill();
	context.strokeStyle = theme.ink;
	context.lineWidth = 1.25;
	context.stroke();
	const { sites } = floorplan;
	if (!sites || Math.min(...sites.pitchUm) * camera.pxPerUm < SITE_LEAST_PX) return;
	const view = viewOf(camera);
	const [pitchX, pitchY] = sites.pitchUm;
	const [originX, originY] = sites.originUm;
	context.save();
	traceOutline(context, camera, floorplan.die.outline);
	context.clip();
	context.fillStyle = theme.inkSoft;
	context.globalAlpha = 0.5;
	for (let i = Math.ceil((view.minX - originX) / pitchX); originX + i * pitchX <= view.maxX; i++) {
		for (
			let j = Math.ceil((view.minY - originY) / pitchY);
			originY + j * pitchY <= view.maxY;
			j++
		) {
			const [px, py] = toScreen(camera, diePoint(originX + i * pitchX, originY + j * pitchY));
			context.fillRect(px - 0.5, py - 0.5, 1, 1);
		}
	}
	context.restore();
}

/** How strongly straps are drawn: by themselves, or faintly over a map that is to be read. */
const STRAP_ALPHA = {
	plain: { line: 0.5, edge: 0.65, fill: 0.16 },
	overMap: { line: 0.16, edge: 0.3, fill: 0.05 }
} as const;

/** A strap is a thin line until it is this wide, px; then it has two edges. */
const STRAP_WIDE_PX = 3;

/**
 * The straps in view, one path per pattern. From afar only every n-th line is drawn, fainter the
 * closer the lines come; from near a strap is a tinted band between two thin edges.
 */
export function paintStraps(
	context: CanvasRenderingContext2D,
	{
		lines,
		camera,
		theme,
		visibility,
		isOverMap
	}: {
		lines: readonly StrapLines[];
		camera: Camera;
		theme: PaintTheme;
		visibility: Visibility;
		isOverMap: boolean;
	}
): void {
	const alpha = isOverMap ? STRAP_ALPHA.overMap : STRAP_ALPHA.plain;
	context.save();
	for (const pattern of lines) {
		const { strap, netKind } = pattern;
		if (!visibility.layers.has(strap.layer) || !visibility.nets.has(strap.net)) continue;
		const pitchPx = strap.pitchUm * camera.pxPerUm;
		const widthPx = strap.widthUm * camera.pxPerUm;
		const every = Math.max(1, Math.ceil(STRAP_LEAST_PX / pitchPx));
		context.beginPath();
		context.strokeStyle = theme.straps[netKind];
		if (widthPx < STRAP_WIDE_PX) {
			tracePieces(context, camera, pattern, every, 0);
			context.globalAlpha = alpha.line * Math.min(1, (pitchPx * every) / STRAP_FAINT_PX);
			context.lineWidth = Math.max(0.6, widthPx);
		} else {
			tracePieces(context, camera, pattern, every, widthPx);
			context.fillStyle = theme.straps[netKind];
			context.globalAlpha = alpha.fill;
			context.fill();
			context.globalAlpha = alpha.edge;
			context.lineWidth = 0.8;
		}
		context.stroke();
	}
	context.restore();
}

/** Traces the pieces of a pattern that are in view: as lines, or as bands of a width, px. */
function tracePieces(
	context: CanvasRenderingContext2D,
	camera: Camera,
	{ strap, isHorizontal, pieces }: StrapLines,
	every: number,
	widthPx: number
): void {
	const view = viewOf(camera);
	const half = strap.widthUm / 2;
	const [low, high] = isHorizontal ? [view.minY, view.maxY] : [view.minX, view.maxX];
	const [left, right] = isHorizontal ? [view.minX, view.maxX] : [view.minY, view.maxY];
	for (let p = 0; p < pieces.length; p += 3) {
		const across = pieces[p + 2];
		if (across + half < low || across - half > high) continue;
		if (Math.round((across - strap.offsetUm) / strap.pitchUm) % every !== 0) continue;
		// Cut to a little more than the view, so that ends and dashes far outside cost nothing.
		const start = Math.max(pieces[p], left - strap.pitchUm);
		const end = Math.min(pieces[p + 1], right + strap.pitchUm);
		if (end <= start) continue;
		const [fromX, fromY] = toScreen(
			camera,
			isHorizontal ? diePoint(start, across) : diePoint(across, start)
		);
		const [toX, toY] = toScreen(
			camera,
			isHorizontal ? diePoint(end, across) : diePoint(across, end)
		);
		if (widthPx > 0 && isHorizontal) {
			context.rect(fromX, fromY - widthPx / 2, toX - fromX, widthPx);
		} else if (widthPx > 0) {
			context.rect(fromX - widthPx / 2, toY, widthPx, fromY - toY);
		} else {
			context.moveTo(fromX, fromY);
			context.lineTo(toX, toY);
		}
	}
}
