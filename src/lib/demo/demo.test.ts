import { describe, expect, it } from 'vitest';
import { hashFloorplan, parseFloorplan } from '#lib/floorplan/index.ts';
import { checkAllPlacements } from '#lib/floorplan/legality/index.ts';
import { makeDemoFloorplan } from './index.ts';

describe('demo floorplan', () => {
	it('is the same for the same seed and another for another', () => {
		expect(hashFloorplan(makeDemoFloorplan(7))).toBe(hashFloorplan(makeDemoFloorplan(7)));
		expect(hashFloorplan(makeDemoFloorplan(7))).not.toBe(hashFloorplan(makeDemoFloorplan(8)));
	});

	it('is a valid document with 96 regulators of two cells, 24 blocks, four modes, three corners', () => {
		const floorplan = makeDemoFloorplan();
		expect(parseFloorplan(JSON.parse(JSON.stringify(floorplan))).status).toBe('parsed');
		const { regulators, cells, blocks, modes, corners, nets } = floorplan;
		expect([regulators, cells, blocks, modes, corners].map((list) => list.length)).toEqual([
			96, 2, 24, 4, 3
		]);
		expect(nets.filter(({ kind }) => kind === 'regulated')).toHaveLength(3);
	});

	it('every regulator stands legally', () => {
		expect(checkAllPlacements(makeDemoFloorplan())).toEqual([]);
	});
});
