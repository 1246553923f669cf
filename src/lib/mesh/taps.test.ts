import { describe, expect, test } from 'vitest';
import { NM_PER_UM } from '#lib/floorplan/index.ts';
import {
	cellOf,
	feedAt,
	latticePlan,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import { meshFloorplan, type Network } from './index.ts';

/** Where a node stands: x um, y um, layer. */
function placeOf({ nodes }: Network, node: number): [number, number, number] {
	return [nodes.xNm[node] / NM_PER_UM, nodes.yNm[node] / NM_PER_UM, nodes.layer[node]];
}

describe('feeds', () => {
	const lattice = { columns: 3, rows: 3, kind: 'input' } as const;

	test('a feed joins the nearest strap of the top layer at a node of its own', () => {
		const network = meshOf(latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 12, 4, 0.5)] }));
		expect(placeOf(network, network.feeds.node[0])).toEqual([10, 4, 1]);
		expect(network.feeds.seriesOhm[0]).toBe(0.5);
		expect(network.nodes.count).toBe(19);
		// The piece from 0 to 10 um is now two: 0.4 and 0.6 of a bond of 1 ohm.
		const ohms = Array.from(network.resistors.nominalOhm);
		expect(ohms.filter((ohm) => Math.abs(ohm - 0.4) < 1e-12)).toHaveLength(1);
		expect(ohms.filter((ohm) => Math.abs(ohm - 0.6) < 1e-12)).toHaveLength(1);
	});

	test('a feed joins the layer it names', () => {
		const network = meshOf(
			latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 12, 4, 0.5, { layer: 'm1' })] })
		);
		expect(placeOf(network, network.feeds.node[0])).toEqual([12, 0, 0]);
	});

	test('a foot point on a crossing shares its node, one nanometre away it does not', () => {
		const on = meshOf(latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 10, 10, 0.5)] }));
		expect(on.nodes.count).toBe(18);
		const beside = meshOf(latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 10, 10.001, 0.5)] }));
		expect(beside.nodes.count).toBe(19);
	});

	test('a feed beyond the end of a strap joins its end', () => {
		const plan = latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 21, 27, 0.5)] });
		const network = meshOf(plan);
		expect(placeOf(network, network.feeds.node[0])).toEqual([20, 20, 1]);
		expect(network.warnings).toEqual([]);
	});

	test('farther than one pitch from its strap it is named in a warning', () => {
		const network = meshOf(latticePlan(lattice, { feeds: [feedAt('f', 'vdd', 31, 20, 0.5)] }));
		expect(network.warnings).toEqual([
			{
				code: 'tap-far',
				message:
					'feeds (f): the nearest strap of net vdd on m2 is 11 um away, farther than one pitch (10 um)',
				subject: 'f',
				atUm: [31, 20]
			}
		]);
	});

	test('a feed whose layer has no strap of its net feeds nothing and is named in a warning', () => {
		const plan = latticePlan(lattice, {
			layers: [
				{ id: 'm1', direction: 'horizontal', sheetOhm: 1 },
				{ id: 'm2', direction: 'vertical', sheetOhm: 1 },
				{ id: 'm3', direction: 'horizontal', sheetOhm: 1 }
			],
			feeds: [feedAt('f', 'vdd', 10, 10, 0.5), feedAt('g', 'vdd', 5, 5, 1, { layer: 'm3' })]
		});
		const network = meshOf(plan);
		expect(network.feeds.node[1]).toBe(-1);
		expect(network.warnings).toMatchObject([{ code: 'feed-unconnected', subject: 'g' }]);
	});
});

describe('regulator pins', () => {
	/** An input and a ground lattice above a rail on m1, and one regulator. */
	function pinPlan(orient: 'R0' | 'R90' | 'MY', enabled = true) {
		return planOf({
			die: { outline: rectangle(0, 0, 100, 100) },
			layers: [
				{ id: 'm1', direction: 'horizontal', sheetOhm: 1 },
				{ id: 'm2', direction: 'vertical', sheetOhm: 1 }
			],
			nets: [
				{ id: 'vin', kind: 'input', volts: 1.2 },
				{ id: 'vdd', kind: 'regulated', volts: 1 },
				{ id: 'gnd', kind: 'ground', volts: 0 }
			],
			straps: [
				{ id: 'i', net: 'vin', layer: 'm2', pitchUm: 200, widthUm: 1, offsetUm: 50 },
				{ id: 'o', net: 'vdd', layer: 'm1', pitchUm: 200, widthUm: 1, offsetUm: 50 },
				{ id: 'g', net: 'gnd', layer: 'm1', pitchUm: 200, widthUm: 1, offsetUm: 60 }
			],
			feeds: [feedAt('fi', 'vin', 50, 0, 0.1), feedAt('fg', 'gnd', 0, 60, 0.1)],
			cells: [
				cellOf('unit', {
					widthUm: 10,
					heightUm: 4,
					pins: { input: [1, 1], output: [9, 2] }
				})
			],
			regulators: [
				{ id: 'r', cell: 'unit', input: 'vin', output: 'vdd', xUm: 40, yUm: 50, orient, enabled }
			],
			mesh: { maxSegmentUm: 1000 }
		});
	}

	test('each pin joins its own net at its place in the oriented footprint', () => {
		// R0: input pin at 41, 51; output pin at 49, 52; ground pin in the centre, 45, 52.
		const r0 = meshOf(pinPlan('R0'));
		expect(placeOf(r0, r0.regulators.inputNode[0])).toEqual([50, 51, 1]);
		expect(placeOf(r0, r0.regulators.outputNode[0])).toEqual([49, 50, 0]);
		expect(placeOf(r0, r0.regulators.groundNode[0])).toEqual([45, 60, 0]);
		// R90 turns the footprint to 4 um x 10 um and (dx, dy) to (4 - dy, dx).
		const r90 = meshOf(pinPlan('R90'));
		expect(placeOf(r90, r90.regulators.inputNode[0])).toEqual([50, 51, 1]);
		expect(placeOf(r90, r90.regulators.outputNode[0])).toEqual([42, 50, 0]);
		expect(placeOf(r90, r90.regulators.groundNode[0])).toEqual([42, 60, 0]);
		// MY mirrors x: (dx, dy) to (10 - dx, dy).
		const my = meshOf(pinPlan('MY'));
		expect(placeOf(my, my.regulators.outputNode[0])).toEqual([41, 50, 0]);
	});

	test('an ideal input and an ideal ground have no node', () => {
		const plan = latticePlan(
			{ columns: 2, rows: 2 },
			{ regulators: [regulatorAt('r', 'vdd', 3, 0)] }
		);
		const { regulators } = meshOf(plan);
		expect(Array.from(regulators.inputNode)).toEqual([-1]);
		expect(Array.from(regulators.groundNode)).toEqual([-1]);
		expect(regulators.outputNode[0]).toBeGreaterThanOrEqual(0);
	});

	test('a unit that is off has the same taps on what is connected, and no other effect', () => {
		const on = meshOf(pinPlan('R0'));
		const off = meshOf(pinPlan('R0', false));
		expect(off.regulators.outputNode[0]).toBe(-1);
		expect(placeOf(off, off.regulators.inputNode[0])).toEqual(
			placeOf(on, on.regulators.inputNode[0])
		);
		// The rail has no other unit, so its three nodes (ends and tap) are left out.
		expect(off.leftOutNodes).toBe(3);
		expect(off.nodes.count).toBe(on.nodes.count - 3);
	});

	test('an enabled unit whose output net has no strap is refused by name', () => {
		const plan = latticePlan({ columns: 2, rows: 2 });
		const result = meshFloorplan({
			...plan,
			nets: [...plan.nets, { id: 'aux', kind: 'regulated', volts: 1, groundReference: 'local' }],
			regulators: [
				{
					id: 'r',
					cell: 'unit',
					input: null,
					output: 'aux',
					xUm: 4,
					yUm: 4,
					orient: 'R0',
					enabled: true,
					fixed: false,
					offsetV: 0
				}
			]
		});
		expect(result).toEqual({
			status: 'refused',
			problems: [
				{
					path: 'regulators (r)',
					message:
						'net aux has no strap on the die that its output pin could join (expected a strap pattern of that net)',
					subject: 'r',
					atUm: [5, 5]
				}
			]
		});
	});
});
