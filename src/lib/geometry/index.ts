export type { Bounds, Outline, Point } from './point.ts';
export { boundsOf, boundsOverlap, containsPoint, rectangleOutline, signedArea } from './polygon.ts';
export { isSimplePolygon } from './simple.ts';
export type { Interval } from './clip-line.ts';
export { clipLineToPolygon } from './clip-line.ts';
export { polygonRectangleArea } from './rectangle-area.ts';
export { polygonContainsBounds, polygonOverlapsBounds, polygonsOverlap } from './overlap.ts';
export type { Orientation } from './orientation.ts';
export { composeOrientations, orientedSize, orientPoint } from './orientation.ts';
