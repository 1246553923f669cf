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
const STRAP_LEAST_PX = 3;

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

/** The straps in view: one path per pattern, thinned out where single lines could not be told apart. */
export function paintStraps(
	context: CanvasRenderingContext2D,
	{
		lines,
		camera,
		theme,
		visibility,
		alpha
	}: {
		lines: readonly StrapLines[];
		camera: Camera;
		theme: PaintTheme;
		visibility: Visibility;
		alpha: number;
	}
): void {
	const view = viewOf(camera);
	context.save();
	context.globalAlpha = alpha;
	for (const { strap, netKind, isHorizontal, pieces } of lines) {
		if (!visibility.layers.has(strap.layer) || !visibility.nets.has(strap.net)) continue;
		const [low, high] = isHorizontal ? [view.minY, view.maxY] : [view.minX, view.maxX];
		const every = Math.max(1, Math.ceil(STRAP_LEAST_PX / (strap.pitchUm * camera.pxPerUm)));
		context.beginPath();
		context.strokeStyle = theme.straps[netKind];
		context.lineWidth = Math.max(0.6, strap.widthUm * camera.pxPerUm);
		for (let p = 0; p < pieces.length; p += 3) {
			const across = pieces[p + 2];
			if (across < low || across > high) continue;
			if (Math.round((across - strap.offsetUm) / strap.pitchUm) % every !== 0) continue;
			const [start, end] = isHorizontal
				? [diePoint(pieces[p], across), diePoint(pieces[p + 1], across)]
				: [diePoint(across, pieces[p]), diePoint(across, pieces[p + 1])];
			context.moveTo(...toScreen(camera, start));
			context.lineTo(...toScreen(camera, end));
		}
		context.stroke();
	}
	context.restore();
}
