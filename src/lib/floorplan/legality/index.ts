export type { PlacementIndex, PlacementReason } from './placement.ts';
export {
	buildPlacementIndex,
	checkAllPlacements,
	checkPlacement,
	footprintOf,
	snapToSite
} from './placement.ts';
