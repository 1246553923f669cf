import type { Bounds } from '#lib/geometry/index.ts';
import { diePoint, screenPoint, type DiePoint, type ScreenPoint } from './points.ts';

/** What part of the die the canvas shows. */
export interface Camera {
	/** The die's point at the canvas's centre, um. */
	readonly centreXUm: number;
	readonly centreYUm: number;
	readonly pxPerUm: number;
	/** Size of the canvas, CSS pixels. */
	readonly widthPx: number;
	readonly heightPx: number;
}

/** One die point per canvas pixel at "100 %": a micrometre is a pixel. */
export const FULL_SCALE_PX_PER_UM = 1;
const LEAST_PX_PER_UM = 1e-3;
const MOST_PX_PER_UM = 1e3;
/** Room left around what is fitted, px. */
const FIT_MARGIN_PX = 24;

export function toScreen(camera: Camera, [xUm, yUm]: DiePoint): ScreenPoint {
	return screenPoint(
		camera.widthPx / 2 + (xUm - camera.centreXUm) * camera.pxPerUm,
		camera.heightPx / 2 - (yUm - camera.centreYUm) * camera.pxPerUm
	);
}

export function toDie(camera: Camera, [xPx, yPx]: ScreenPoint): DiePoint {
	return diePoint(
		camera.centreXUm + (xPx - camera.widthPx / 2) / camera.pxPerUm,
		camera.centreYUm - (yPx - camera.heightPx / 2) / camera.pxPerUm
	);
}

export function panBy(camera: Camera, dxPx: number, dyPx: number): Camera {
	return {
		...camera,
		centreXUm: camera.centreXUm - dxPx / camera.pxPerUm,
		centreYUm: camera.centreYUm + dyPx / camera.pxPerUm
	};
}

/** Zooms by a factor; the die's point under the given screen point stays under it. */
export function zoomAt(camera: Camera, point: ScreenPoint, factor: number): Camera {
	const pxPerUm = Math.min(MOST_PX_PER_UM, Math.max(LEAST_PX_PER_UM, camera.pxPerUm * factor));
	const [xUm, yUm] = toDie(camera, point);
	return {
		...camera,
		pxPerUm,
		centreXUm: xUm - (point[0] - camera.widthPx / 2) / pxPerUm,
		centreYUm: yUm + (point[1] - camera.heightPx / 2) / pxPerUm
	};
}

/** Shows a part of the die whole, at most at the given scale. */
export function fit(camera: Camera, bounds: Bounds, mostPxPerUm = MOST_PX_PER_UM): Camera {
	const width = Math.max(bounds.maxX - bounds.minX, 1e-3);
	const height = Math.max(bounds.maxY - bounds.minY, 1e-3);
	const room = (px: number) => Math.max(px - 2 * FIT_MARGIN_PX, 1);
	return {
		...camera,
		centreXUm: (bounds.minX + bounds.maxX) / 2,
		centreYUm: (bounds.minY + bounds.maxY) / 2,
		pxPerUm: Math.min(mostPxPerUm, room(camera.widthPx) / width, room(camera.heightPx) / height)
	};
}

/** Moves a fitted rectangle to the right of something that covers the left, as far as there is room. */
export function beside(camera: Camera, bounds: Bounds, coveredPx: number): Camera {
	const spare = camera.widthPx / 2 - ((bounds.maxX - bounds.minX) / 2) * camera.pxPerUm;
	const shift = Math.min(coveredPx + FIT_MARGIN_PX - spare, spare - FIT_MARGIN_PX);
	return shift <= 0 ? camera : panBy(camera, shift, 0);
}

/** The part of the die in view, um. */
export function viewOf(camera: Camera): Bounds {
	const halfWidth = camera.widthPx / 2 / camera.pxPerUm;
	const halfHeight = camera.heightPx / 2 / camera.pxPerUm;
	return {
		minX: camera.centreXUm - halfWidth,
		minY: camera.centreYUm - halfHeight,
		maxX: camera.centreXUm + halfWidth,
		maxY: camera.centreYUm + halfHeight
	};
}
