import type { ScreenPoint } from './points.ts';

/** A pointer event as tools see it. */
export interface PointerInput {
	readonly point: ScreenPoint;
	/** Adds to the selection instead of replacing it. */
	readonly isAdding: boolean;
	/** Suspends snapping. */
	readonly isFree: boolean;
}
