import { expect, it } from 'vitest';
import type { DropMap } from '#lib/results/index.ts';
import { readAt } from './reading.ts';
import { diePoint } from './points.ts';

const camera = { centreXUm: 0, centreYUm: 0, pxPerUm: 2, widthPx: 100, heightPx: 100 };
/** Two columns, two rows, cells of 10 um from the origin; the upper right one without a rail. */
const map: DropMap = {
	columns: 2,
	rows: 2,
	originXNm: 0,
	originYNm: 0,
	cellNm: 10_000,
	dropV: Float32Array.from([0.01, 0.02, 0.03, NaN]),
	netDropV: Float32Array.from([0.008, 0.015, 0.02, NaN]),
	groundRiseV: Float32Array.from([0.002, 0.005, 0.01, NaN])
};
const maps = [{ net: 'vdd', map, limitV: 0.05 }];
const read = (xUm: number, yUm: number, plane: 'dropV' | 'groundRiseV' = 'dropV') =>
	readAt(diePoint(xUm, yUm), { maps, plane, camera, nearest: () => null }).value;

it.each([
	[5, 5, 0.01],
	[15, 5, 0.02],
	[5, 15, 0.03],
	[9.999, 9.999, 0.01],
	[10, 0, 0.02]
])('at %s, %s um it is the stored value of the cell', (xUm, yUm, volts) => {
	expect(read(xUm, yUm)?.volts).toBe(Math.fround(volts));
});

it('says which net, and how much of the limit it takes', () => {
	expect(read(15, 5)).toMatchObject({ net: 'vdd', share: Math.fround(0.02) / 0.05 });
});

it('nothing is read where there is no rail, and outside the map', () => {
	expect(read(15, 15)).toBeNull();
	expect(read(-1, 5)).toBeNull();
	expect(read(5, 21)).toBeNull();
});

it('the reach for the nearest thing is 40 px at any zoom', () => {
	let reach = 0;
	readAt(diePoint(0, 0), {
		maps,
		plane: 'dropV',
		camera,
		nearest: (_place, reachUm) => {
			reach = reachUm;
			return null;
		}
	});
	expect(reach).toBe(20);
});
