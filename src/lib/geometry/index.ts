export type { Bounds, Outline, Point } from './polygon.ts';
export { boundsOf, boundsOverlap, containsPoint, rectangleOutline, signedArea } from './polygon.ts';
export { isSimplePolygon } from './simple.ts';
export type { Interval } from './clip-line.ts';
export { clipLineToPolygon } from './clip-line.ts';
export { polygonContainsBounds, polygonRectangleArea, polygonsOverlap } from './overlap.ts';
export type { Orientation } from './orientation.ts';
export { composeOrientations, orientedSize, orientPoint } from './orientation.ts';
