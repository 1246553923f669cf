import type { FloorplanInput } from '#lib/floorplan/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';

type FeedInput = NonNullable<FloorplanInput['feeds']>[number];

const BUMP_PITCH_UM = 240;
const FIRST_BUMP_UM = 120;
const BUMP_OHM = 0.025;
const BUMP_MAX_A = 0.06;

/** The field kept free for a sensor window: no input bumps here, so the input rail sags beneath. */
export const windowArea: Bounds = { minX: 0, minY: 3300, maxX: 1500, maxY: 5000 };

function isInWindow(xUm: number, yUm: number): boolean {
	return (
		xUm >= windowArea.minX &&
		xUm <= windowArea.maxX &&
		yUm >= windowArea.minY &&
		yUm <= windowArea.maxY
	);
}

/** Bumps in a checkerboard of input and ground over the die. */
export function dieFeeds(dieWidthUm: number, dieHeightUm: number): FeedInput[] {
	const feeds: FeedInput[] = [];
	for (let row = 0; FIRST_BUMP_UM + row * BUMP_PITCH_UM < dieHeightUm; row++) {
		for (let column = 0; FIRST_BUMP_UM + column * BUMP_PITCH_UM < dieWidthUm; column++) {
			const xUm = FIRST_BUMP_UM + column * BUMP_PITCH_UM;
			const yUm = FIRST_BUMP_UM + row * BUMP_PITCH_UM;
			const isInput = (row + column) % 2 === 0;
			if (isInput && isInWindow(xUm, yUm)) continue;
			feeds.push({
				id: `${isInput ? 'in' : 'gnd'}_${row}_${column}`,
				net: isInput ? 'vin' : 'gnd',
				xUm,
				yUm,
				seriesOhm: BUMP_OHM,
				maxA: BUMP_MAX_A
			});
		}
	}
	return feeds;
}
