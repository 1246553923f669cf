import type { DropMap } from '#lib/results/index.ts';
import type { Camera } from './camera.ts';
import { mapValueAt, type MapPlane } from './paint/map-image.ts';
import type { DiePoint } from './points.ts';
import type { ItemKey } from './selection.ts';

/** How far away a thing may be to be named in a reading, px. */
const NEAREST_REACH_PX = 40;

/** A net's map with the limit that holds for what it shows, V. */
export interface LimitedMap {
	readonly net: string;
	readonly map: DropMap;
	readonly limitV: number | null;
}

/** What can be read at a place. */
export interface Reading {
	readonly xUm: number;
	readonly yUm: number;
	/** The stored value of the cell there, never an interpolation; null where there is no rail. */
	readonly value: {
		readonly net: string;
		readonly volts: number;
		/** Part of the limit that it takes; null where nothing limits it. */
		readonly share: number | null;
	} | null;
	readonly nearest: { readonly key: ItemKey; readonly distanceUm: number } | null;
}

/** Reads the maps and the drawing at a place. */
export function readAt(
	place: DiePoint,
	{
		maps,
		plane,
		camera,
		nearest
	}: {
		maps: readonly LimitedMap[];
		plane: MapPlane;
		camera: Camera;
		/** Finds the nearest thing that is shown, within a reach in um. */
		nearest: (place: DiePoint, reachUm: number) => Reading['nearest'];
	}
): Reading {
	const [xUm, yUm] = place;
	let value: Reading['value'] = null;
	for (const { net, map, limitV } of maps) {
		const volts = mapValueAt(map, plane, xUm, yUm);
		if (volts === null) continue;
		value = { net, volts, share: limitV === null || limitV === 0 ? null : volts / limitV };
		break;
	}
	return { xUm, yUm, value, nearest: nearest(place, NEAREST_REACH_PX / camera.pxPerUm) };
}
