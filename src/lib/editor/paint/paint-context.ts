import type { Bounds } from '#lib/geometry/index.ts';
import type { Cell, Floorplan } from '#lib/floorplan/index.ts';
import { toScreen, type Camera } from '../camera.ts';
import { diePoint } from '../points.ts';
import type { PaintTheme } from './theme.ts';

/** Where and in which colours something is painted. */
export interface PaintContext {
	readonly context: CanvasRenderingContext2D;
	readonly camera: Camera;
	readonly theme: PaintTheme;
}

export const FONT = '"Source Sans 3", sans-serif';

/** A rectangle on the screen, px. */
export type Box = readonly [left: number, top: number, width: number, height: number];

/** A rectangle on the die as screen pixels. */
export function screenRect(camera: Camera, { minX, minY, maxX, maxY }: Bounds): Box {
	const [left, top] = toScreen(camera, diePoint(minX, maxY));
	return [left, top, (maxX - minX) * camera.pxPerUm, (maxY - minY) * camera.pxPerUm];
}

/** Radius of a bump's mark, px: about its true size, but never too small to see nor in the way. */
export function feedRadiusPx({ pxPerUm }: Camera): number {
	return Math.min(9, Math.max(1.4, 20 * pxPerUm));
}

/** Cells of a document by id, for footprints. */
export function cellsById(floorplan: Floorplan): ReadonlyMap<string, Cell> {
	return new Map(floorplan.cells.map((cell) => [cell.id, cell]));
}
