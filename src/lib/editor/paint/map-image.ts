import { contours } from 'd3-contour';
import type { DropMap } from '#lib/results/index.ts';
import { washStep } from './wash.ts';

/** What of a map is shown. */
export type MapPlane = 'dropV' | 'netDropV' | 'groundRiseV';

/** Range of values over maps, V; cells without a rail do not count. */
export function mapRange(
	maps: readonly DropMap[],
	plane: MapPlane
): { readonly min: number; readonly max: number } {
	let min = Infinity;
	let max = -Infinity;
	for (const map of maps) {
		for (const value of map[plane]) {
			if (value < min) min = value;
			if (value > max) max = value;
		}
	}
	return min <= max ? { min, max } : { min: 0, max: 0 };
}

/**
 * A map as RGBA bytes, top row first, as images have it: one pixel per cell, its value's step of the
 * wash; cells without a rail are transparent.
 */
export function mapPixels(
	map: DropMap,
	plane: MapPlane,
	wash: Uint8ClampedArray,
	range: { readonly min: number; readonly max: number }
): Uint8ClampedArray<ArrayBuffer> {
	const { columns, rows } = map;
	const values = map[plane];
	const pixels = new Uint8ClampedArray(4 * columns * rows);
	for (let row = 0; row < rows; row++) {
		for (let column = 0; column < columns; column++) {
			const value = values[row * columns + column];
			if (Number.isNaN(value)) continue;
			const step = 3 * washStep(value, range.min, range.max);
			const pixel = 4 * ((rows - 1 - row) * columns + column);
			pixels[pixel] = wash[step];
			pixels[pixel + 1] = wash[step + 1];
			pixels[pixel + 2] = wash[step + 2];
			pixels[pixel + 3] = 255;
		}
	}
	return pixels;
}

/** Rings around everything above a level, in cell units from the map's lower left corner. */
export type ContourRings = readonly (readonly (readonly [number, number])[])[];

/** Where a map passes a level; cells without a rail count as far below it. */
export function limitContour(map: DropMap, plane: MapPlane, levelV: number): ContourRings {
	const values = Array.from(map[plane], (value) => (Number.isNaN(value) ? -1e9 : value));
	const shape = contours().size([map.columns, map.rows]).smooth(false).contour(values, levelV);
	return shape.coordinates.flat() as unknown as ContourRings;
}

/** The value of the cell at a place, um; null outside the map and where there is no rail. */
export function mapValueAt(map: DropMap, plane: MapPlane, xUm: number, yUm: number): number | null {
	const column = Math.floor((xUm * 1000 - map.originXNm) / map.cellNm);
	const row = Math.floor((yUm * 1000 - map.originYNm) / map.cellNm);
	if (column < 0 || row < 0 || column >= map.columns || row >= map.rows) return null;
	const value = map[plane][row * map.columns + column];
	return Number.isNaN(value) ? null : value;
}
