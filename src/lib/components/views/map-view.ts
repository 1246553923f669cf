import type { Floorplan, Limits } from '#lib/floorplan/index.ts';
import {
	limitContour,
	mapPixels,
	mapRange,
	type MapPlane,
	type PreparedMap
} from '#lib/editor/paint/index.ts';
import type { DropMap, RegulatorResult, ResultFile } from '#lib/results/index.ts';

/** What the map shows: which rails, and which part of the drop. */
export const MAP_QUANTITIES = [
	{ value: 'dropV', label: 'Drop seen by loads' },
	{ value: 'netDropV', label: 'Drop, net side' },
	{ value: 'groundRiseV', label: 'Rise, ground side' }
] as const satisfies readonly { value: MapPlane; label: string }[];

/** Choice that shows the maps of all regulated nets at once, on one scale. */
export const ALL_RAILS = '*';

/** Nets whose maps a choice shows. */
export function netsOf(floorplan: Floorplan, choice: string): string[] {
	if (choice !== ALL_RAILS) return [choice];
	return floorplan.nets.filter(({ kind }) => kind === 'regulated').map(({ id }) => id);
}

/** A net with its map. */
export interface NetMap {
	readonly net: string;
	readonly map: DropMap;
}

/** Limit of what is shown of a net, V; null where nothing is limited. */
export function dropLimitOf(limits: Limits, net: string, plane: MapPlane): number | null {
	// The limit is on what a load sees, not on one of its two parts.
	return plane === 'dropV' ? (limits.overrides?.nets?.[net]?.dropV ?? limits.dropV ?? null) : null;
}

export interface MapPicture {
	readonly maps: readonly PreparedMap[];
	readonly range: { readonly min: number; readonly max: number };
	readonly limitsV: readonly number[];
}

/** An image of RGBA bytes. */
export type MakeImage = (
	pixels: Uint8ClampedArray<ArrayBuffer>,
	columns: number,
	rows: number
) => CanvasImageSource;

/** Maps of several nets on one scale from 0, made ready to be painted. */
export function preparePicture(
	drawnLimits: Limits,
	maps: readonly NetMap[],
	plane: MapPlane,
	wash: Uint8ClampedArray,
	makeImage: MakeImage
): MapPicture {
	const { min, max } = mapRange(
		maps.map(({ map }) => map),
		plane
	);
	// From 0 up, so that the same colour is the same drop in every mode; below only where there is a rise.
	const range = { min: Math.min(0, min), max: Math.max(max, 1e-9) };
	const limits = maps.map(({ net }) => dropLimitOf(drawnLimits, net, plane));
	return {
		range,
		limitsV: [...new Set(limits.filter((limit) => limit !== null))].sort((a, b) => a - b),
		maps: maps.map(({ map }, i) => {
			const limit = limits[i];
			return {
				map,
				image: makeImage(mapPixels(map, plane, wash, range), map.columns, map.rows),
				contour: limit === null ? null : limitContour(map, plane, limit)
			};
		})
	};
}

/** What a result says of each regulator, by id. */
export function regulatorsById(result: ResultFile | null): ReadonlyMap<string, RegulatorResult> {
	return new Map(result?.regulators.map((one) => [one.id, one]));
}

/** A net, mode or corner as a choice of a list. */
export function optionOf({ id, name }: { readonly id: string; readonly name?: string }) {
	return { value: id, label: name ?? id };
}
