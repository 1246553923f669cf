import { boundsOf, clipLineToPolygon } from '#lib/geometry/index.ts';
import type { Bounds, Outline } from '#lib/geometry/index.ts';

/**
 * A polygon with only horizontal and vertical edges as rectangles without overlap, cut at the
 * height of every corner; null for any other polygon.
 */
export function rectanglesOf(outline: Outline): Bounds[] | null {
	const isRectilinear = outline.every(([x, y], i) => {
		const [nextX, nextY] = outline[(i + 1) % outline.length];
		return x === nextX || y === nextY;
	});
	if (!isRectilinear) return null;
	if (outline.length === 4) return [boundsOf(outline)];
	const heights = [...new Set(outline.map(([, y]) => y))].sort((a, b) => a - b);
	return heights.slice(1).flatMap((maxY, i) => {
		const minY = heights[i];
		return clipLineToPolygon(outline, 'horizontal', (minY + maxY) / 2).map(([minX, maxX]) => ({
			minX,
			minY,
			maxX,
			maxY
		}));
	});
}
