export type { PaintTheme } from './theme.ts';
export { readTheme } from './theme.ts';
export { makeWash, WASH_STEPS, washStep } from './wash.ts';
export type { ContourRings, MapPlane } from './map-image.ts';
export { limitContour, mapPixels, mapRange, mapValueAt } from './map-image.ts';
export type { StrapLines } from './strap-lines.ts';
export { strapLines } from './strap-lines.ts';
export { paintSheet, paintStraps, traceOutline } from './paint-base.ts';
export type { PreparedMap } from './paint-map.ts';
export { paintMaps } from './paint-map.ts';
export type { PaintContext, RegulatorPicture } from './paint-objects.ts';
export {
	cellsById,
	paintBlock,
	paintFeed,
	paintKeepout,
	paintMarked,
	paintRegulator,
	paintSpot
} from './paint-objects.ts';
export type { OverlayPicture } from './paint-overlay.ts';
export { paintOverlay } from './paint-overlay.ts';
export type { Scene } from './paint-scene.ts';
export { paintScene } from './paint-scene.ts';
