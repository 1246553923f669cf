import type { Bounds } from '#lib/geometry/index.ts';
import type { Regulator } from '#lib/floorplan/index.ts';
import type { PlacementReason } from '#lib/floorplan/legality/index.ts';
import type { DiePoint } from './points.ts';
import type { ItemKey } from './selection.ts';
import type { Guide } from './snapping.ts';

/** Things that are being moved, before they are let go. */
export interface DragPreview {
	readonly keys: ReadonlySet<ItemKey>;
	readonly dxUm: number;
	readonly dyUm: number;
	/** Reasons against the new places, by regulator id. */
	readonly reasons: ReadonlyMap<string, readonly PlacementReason[]>;
	/** Lines along which the grabbed thing agrees with its neighbours. */
	readonly guides: readonly Guide[];
}

/** A regulator that follows the pointer until it is placed. */
export interface Ghost {
	readonly regulator: Regulator;
	readonly reasons: readonly PlacementReason[];
}

/** What is drawn over the document while a tool works. */
export interface Overlay {
	readonly drag?: DragPreview;
	readonly marquee?: Bounds;
	readonly ghost?: Ghost;
	/** The place that the arrow keys read. */
	readonly probe?: DiePoint;
}
