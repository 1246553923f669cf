import type { Point } from './point.ts';

/**
 * The eight usual orientations: turns to the left by 0 to 270 degrees, a mirror about the x axis
 * (MX) or about the y axis (MY), and each mirror followed by a turn of 90 degrees.
 */
export type Orientation = 'R0' | 'R90' | 'R180' | 'R270' | 'MX' | 'MY' | 'MXR90' | 'MYR90';

/** Linear part of each orientation, row by row: x' = a x + b y, y' = c x + d y. */
const MATRICES: Record<Orientation, readonly [number, number, number, number]> = {
	R0: [1, 0, 0, 1],
	R90: [0, -1, 1, 0],
	R180: [-1, 0, 0, -1],
	R270: [0, 1, -1, 0],
	MX: [1, 0, 0, -1],
	MY: [-1, 0, 0, 1],
	MXR90: [0, 1, 1, 0],
	MYR90: [0, -1, -1, 0]
};

/** Whether width and height change places. */
function isTurned(orient: Orientation): boolean {
	return MATRICES[orient][0] === 0;
}

/** Width and height of an oriented footprint. */
export function orientedSize(
	width: number,
	height: number,
	orient: Orientation
): readonly [width: number, height: number] {
	return isTurned(orient) ? [height, width] : [width, height];
}

/**
 * Where a point of the unturned footprint (from its lower left corner) lies once oriented, from
 * the lower left corner of the oriented footprint.
 */
export function orientPoint(
	[x, y]: Point,
	width: number,
	height: number,
	orient: Orientation
): Point {
	const [a, b, c, d] = MATRICES[orient];
	const left = Math.min(0, a * width) + Math.min(0, b * height);
	const bottom = Math.min(0, c * width) + Math.min(0, d * height);
	return [a * x + b * y - left, c * x + d * y - bottom];
}

/** The orientation that results from `first` and then `second`. */
export function composeOrientations(first: Orientation, second: Orientation): Orientation {
	const [a, b, c, d] = MATRICES[second];
	const [e, f, g, h] = MATRICES[first];
	const product = [a * e + b * g, a * f + b * h, c * e + d * g, c * f + d * h];
	const names = Object.keys(MATRICES) as Orientation[];
	const found = names.find((name) => MATRICES[name].every((value, i) => value === product[i]));
	if (!found) throw new Error(`no orientation is ${first} followed by ${second}`);
	return found;
}
