import { describe, expect, test } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import {
	feedAt,
	latticePlan,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import { meshFloorplan, resistancesAt, type ModelProblem } from './index.ts';

/** A rail of two straps at y = 0 and y = 20 that nothing joins. */
function twoStraps(parts: Partial<Floorplan>): Floorplan {
	return {
		...planOf({
			die: { outline: rectangle(0, 0, 100, 20) },
			layers: [{ id: 'm1', direction: 'horizontal', sheetOhm: 1 }],
			nets: [{ id: 'vdd', kind: 'regulated', volts: 1 }],
			straps: [{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: 20, widthUm: 1, offsetUm: 0 }],
			mesh: { maxSegmentUm: 50 }
		}),
		...parts
	};
}

const base = latticePlan(
	{ columns: 2, rows: 2 },
	{
		regulators: [regulatorAt('r', 'vdd', 10, 0)],
		blocks: [
			loadAt('low', 'vdd', 50, 0, 0.2),
			loadAt('high', 'vdd', 50, 20, 0.3),
			loadAt('dark', 'vdd', 50, 20, 0)
		]
	}
);
const { cells, regulators } = base;
const [low, high, dark] = base.blocks;

function problemsOf(plan: Floorplan): readonly ModelProblem[] {
	const result = meshFloorplan(plan);
	return result.status === 'refused' ? result.problems : [];
}

describe('parts of a net without a source', () => {
	test('carrying nothing they are left out and counted', () => {
		const network = meshOf(twoStraps({ cells, regulators, blocks: [low] }));
		// y = 0: 0, 10 (pin), 55, 100; y = 20: 0, 50, 100.
		expect(network.nodes.count).toBe(4);
		expect(network.leftOutNodes).toBe(3);
		expect(network.nets[0].nodeCount).toBe(4);
	});

	test('carrying load they are refused with block, place, wanted and available current', () => {
		expect(problemsOf(twoStraps({ cells, regulators, blocks: [low, high] }))).toEqual([
			{
				path: 'blocks (high)',
				message:
					'loads a part of net vdd that has no enabled regulator, at 50, 20 um: wanted there ' +
					'up to 0.3 A, available 0 A (expected straps or vias that join this part to one)',
				subject: 'high',
				atUm: [50, 20]
			}
		]);
	});

	test('a block without current in any mode carries no load and moves to what is connected', () => {
		const network = meshOf(twoStraps({ cells, regulators, blocks: [dark] }));
		expect(network.loads.count).toBe(1);
		expect(network.nodes.yNm[network.loads.node[0]]).toBe(0);
		expect(network.loads.share[0]).toBe(1);
	});

	test('a regulator that is off is no source', () => {
		const off = [{ ...regulators[0], enabled: false }];
		expect(problemsOf(twoStraps({ cells, regulators: off, blocks: [low] }))).toMatchObject([
			{ path: 'blocks (low)', atUm: [55, 0] }
		]);
		expect(meshOf(twoStraps({ cells, regulators: off, blocks: [] }))).toMatchObject({
			leftOutNodes: 7,
			nets: [{ nodeCount: 0, lowestLayer: -1, highestLayer: -1 }]
		});
	});

	test('a block on a net without straps is refused', () => {
		const plan = twoStraps({ cells, regulators, blocks: [{ ...low, net: 'aux' }] });
		const nets = [
			...plan.nets,
			{ id: 'aux', kind: 'regulated' as const, volts: 1, groundReference: 'local' as const }
		];
		expect(problemsOf({ ...plan, nets })).toMatchObject([
			{ path: 'blocks (low)', subject: 'low', atUm: [50, 0] }
		]);
	});

	test('an input pin on a part without a feed is refused with the regulator', () => {
		const plan = twoStraps({
			cells,
			regulators: [{ ...regulators[0], input: 'vin' }],
			blocks: []
		});
		const withInput: Floorplan = {
			...plan,
			layers: [...plan.layers, { ...plan.layers[0], id: 'm2', direction: 'vertical' }],
			nets: [...plan.nets, { id: 'vin', kind: 'input', volts: 1.2, groundReference: 'local' }],
			straps: [
				...plan.straps,
				{ id: 'i', net: 'vin', layer: 'm2', pitchUm: 80, widthUm: 1, offsetUm: 10 }
			]
		};
		const far = [{ ...feedAt('f', 'vin', 90, 10, 0.1), seriesOhm: 0.1 }];
		expect(problemsOf({ ...withInput, feeds: far })).toEqual([
			{
				path: 'regulators (r)',
				message:
					'its input pin joins a part of net vin that has no feed, at 10, 0 um ' +
					'(expected straps or vias that join this part to one)',
				subject: 'r',
				atUm: [10, 0]
			}
		]);
		const near = [{ ...far[0], xUm: 10 }];
		expect(meshOf({ ...withInput, feeds: near }).leftOutNodes).toBeGreaterThan(0);
	});

	test('a load beside a loose ground strap is refused', () => {
		const plan = twoStraps({ cells, regulators, blocks: [low] });
		const withGround = (offsetUm: number): Floorplan => ({
			...plan,
			nets: [...plan.nets, { id: 'gnd', kind: 'ground', volts: 0, groundReference: 'local' }],
			straps: [
				...plan.straps,
				{
					id: 'g',
					net: 'gnd',
					layer: 'm1',
					pitchUm: 8,
					widthUm: 1,
					offsetUm,
					region: rectangle(0, 3, 100, 16)
				}
			],
			feeds: [feedAt('f', 'gnd', 0, 12, 0.1)]
		});
		// Straps of the ground at y = 4 and 12, the feed on the upper one.
		expect(problemsOf(withGround(4))).toMatchObject([
			{
				path: 'regulators (r)',
				message: expect.stringContaining('ground pin joins a part of net gnd that has no feed')
			},
			{
				path: 'blocks (low)',
				message: expect.stringContaining('its current returns into a part of net gnd'),
				subject: 'low'
			}
		]);
		// With a pitch that leaves only the one at y = 12 there is nothing loose.
		expect(
			problemsOf({
				...withGround(12),
				straps: [...plan.straps, { ...withGround(12).straps[1], pitchUm: 80 }]
			})
		).toEqual([]);
	});
});

describe('resistances at a corner', () => {
	const corner = { id: 'hot', temperatureC: 125, metalScale: 1.1, loadScale: 1, outputOhmScale: 1 };

	test('strap and via resistances follow the temperature of their layer and the metal scale', () => {
		const plan = latticePlan(
			{ columns: 2, rows: 2, viaOhm: 2 },
			{ regulators: [regulatorAt('r', 'vdd', 0, 0)] }
		);
		const warm: Floorplan = {
			...plan,
			layers: [
				{ ...plan.layers[0], tempCoPerC: 0.004 },
				{ ...plan.layers[1], tempCoPerC: 0.002, refC: 75 }
			]
		};
		const result = resistancesAt(meshOf(warm), warm, corner);
		if (result.status === 'refused') throw new Error('expected resistances');
		// m1: 1 + 0.004 * 100 = 1.4; m2: 1 + 0.002 * 50 = 1.1; vias follow the lower layer.
		const expected = [1.4, 1.4, 1.1, 1.1, 2.8, 2.8, 2.8, 2.8].map((ohm) => ohm * 1.1);
		expect(result.ohm).toHaveLength(8);
		result.ohm.forEach((ohm, r) => expect(ohm).toBeCloseTo(expected[r], 12));
	});

	test('a temperature at which a resistance would vanish is refused', () => {
		const plan = latticePlan(
			{ columns: 2, rows: 2 },
			{ regulators: [regulatorAt('r', 'vdd', 0, 0)] }
		);
		const frozen: Floorplan = {
			...plan,
			layers: [{ ...plan.layers[0], tempCoPerC: 0.004 }, plan.layers[1]]
		};
		expect(resistancesAt(meshOf(frozen), frozen, { ...corner, temperatureC: -225 })).toMatchObject({
			status: 'refused',
			problems: [{ path: 'corners (hot)', subject: 'hot' }]
		});
	});
});
