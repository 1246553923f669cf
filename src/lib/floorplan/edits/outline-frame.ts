import { boundsOf } from '#lib/geometry/index.ts';
import { onGridUm, type OutlineUm } from '../primitives.ts';

/** The rectangle around an outline, by its lower left corner and its size, um. */
export interface OutlineFrame {
	readonly xUm: number;
	readonly yUm: number;
	readonly widthUm: number;
	readonly heightUm: number;
}

export function frameOf(outline: OutlineUm): OutlineFrame {
	const { minX, minY, maxX, maxY } = boundsOf(outline);
	return {
		xUm: minX,
		yUm: minY,
		widthUm: onGridUm(maxX - minX),
		heightUm: onGridUm(maxY - minY)
	};
}

/**
 * The outline moved and stretched into another frame, corners on the nanometre grid. What is left
 * out of the frame stays; widths and heights must be greater than 0.
 */
export function withFrame(outline: OutlineUm, frame: Partial<OutlineFrame>): OutlineUm {
	const before = frameOf(outline);
	const after = { ...before, ...frame };
	const scaleX = after.widthUm / before.widthUm;
	const scaleY = after.heightUm / before.heightUm;
	return outline.map(([x, y]) => [
		onGridUm(after.xUm + (x - before.xUm) * scaleX),
		onGridUm(after.yUm + (y - before.yUm) * scaleY)
	]);
}
