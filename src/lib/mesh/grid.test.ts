import { describe, expect, test } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import {
	ladderPlan,
	latticePlan,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import { meshFloorplan, RESISTOR_SEGMENT, RESISTOR_VIA, type Network } from './index.ts';

/** Positions of the nodes of one layer, um, in the order of the numbering. */
function nodesOn({ nodes }: Network, layer: number): [number, number][] {
	return Array.from(nodes.xNm, (x, n): [number, number] => [x / 1000, nodes.yNm[n] / 1000]).filter(
		(_, n) => nodes.layer[n] === layer
	);
}

function ohms({ resistors }: Network, kind: number): number[] {
	return Array.from(resistors.nominalOhm).filter((_, r) => resistors.kind[r] === kind);
}

const source = [regulatorAt('r', 'vdd', 0, 0)];

describe('straps and crossings', () => {
	test('a lattice of 3 x 2 crossings has a node on each layer of each and a via between them', () => {
		const network = meshOf(latticePlan({ columns: 3, rows: 2, viaOhm: 7 }, { regulators: source }));
		expect(network.nodes.count).toBe(12);
		expect(nodesOn(network, 0)).toEqual([
			[0, 0],
			[10, 0],
			[20, 0],
			[0, 10],
			[10, 10],
			[20, 10]
		]);
		expect(nodesOn(network, 1)).toEqual([
			[0, 0],
			[0, 10],
			[10, 0],
			[10, 10],
			[20, 0],
			[20, 10]
		]);
		expect(ohms(network, RESISTOR_SEGMENT)).toEqual([1, 1, 1, 1, 1, 1, 1]);
		expect(ohms(network, RESISTOR_VIA)).toEqual([7, 7, 7, 7, 7, 7]);
		const { from, to, kind } = network.resistors;
		for (let r = 0; r < network.resistors.count; r++) {
			const isVia = kind[r] === RESISTOR_VIA;
			expect(network.nodes.xNm[from[r]] === network.nodes.xNm[to[r]]).toBe(
				isVia || network.nodes.layer[from[r]] === 1
			);
		}
	});

	test('a piece has sheet resistance times length over width', () => {
		const plan = planOf({
			die: { outline: rectangle(0, 0, 100, 20) },
			layers: [
				{ id: 'm1', direction: 'horizontal', sheetOhm: 0.03 },
				{ id: 'm2', direction: 'vertical', sheetOhm: 0.5 }
			],
			vias: [{ id: 'v', lower: 'm1', upper: 'm2', ohmPerCut: 9, cutsPerUm2: 1.5 }],
			nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
			straps: [
				{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: 100, widthUm: 2, offsetUm: 10 },
				{ id: 'v', net: 'vdd', layer: 'm2', pitchUm: 100, widthUm: 1.2, offsetUm: 40 }
			],
			feeds: [{ id: 'f', net: 'vdd', xUm: 40, yUm: 20, seriesOhm: 0.1 }]
		});
		const network = meshOf(plan);
		// Horizontal 0-40-100 um, vertical 0-10-20 um; 2 um x 1.2 um x 1.5 cuts = 3.6, so 3 cuts of 9 ohm.
		const expected = [(0.03 * 40) / 2, (0.03 * 60) / 2, (0.5 * 10) / 1.2, (0.5 * 10) / 1.2];
		const segments = ohms(network, RESISTOR_SEGMENT);
		expect(segments).toHaveLength(4);
		segments.forEach((ohm, r) => expect(ohm).toBeCloseTo(expected[r], 12));
		expect(ohms(network, RESISTOR_VIA)).toEqual([3]);
		expect(Array.from(network.resistors.cuts)).toEqual([0, 0, 0, 0, 3]);
		expect(Array.from(network.resistors.source)).toEqual([0, 0, 1, 1, 0]);
		expect(network.nets[0]).toMatchObject({ lowestLayer: 0, highestLayer: 1, nodeCount: 6 });
	});

	test('a via has at least one cut, and a product a rounding below a whole number counts as it', () => {
		const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
		const [h, v] = plan.straps;
		const wide = {
			...plan,
			vias: [{ ...plan.vias[0], ohmPerCut: 1, cutsPerUm2: 0.29 }],
			straps: [
				{ ...h, widthUm: 10 },
				{ ...v, widthUm: 10 }
			]
		};
		expect(meshOf(plan).resistors.cuts.at(-1)).toBe(1);
		// 10 um x 10 um x 0.29 is 29 on paper and 28.999999999999996 in doubles.
		expect(meshOf(wide).resistors.cuts.at(-1)).toBe(29);
		expect(ohms(meshOf(wide), RESISTOR_VIA)[0]).toBe(1 / 29);
	});

	test('straps keep the dangling ends beyond their last crossing', () => {
		const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
		const wider = { ...plan, die: { outline: rectangle(-4, 0, 13, 10) } };
		expect(nodesOn(meshOf(wider), 0).slice(0, 4)).toEqual([
			[-4, 0],
			[0, 0],
			[10, 0],
			[13, 0]
		]);
	});

	test('meshing the same document twice gives the same network', () => {
		const plan = latticePlan({ columns: 7, rows: 5 }, { regulators: source });
		expect(meshFloorplan(plan)).toEqual(meshFloorplan(structuredClone(plan)));
	});
});

describe('clipping and cutting', () => {
	test('a pattern is clipped to its region and to the die', () => {
		const plan = latticePlan({ columns: 4, rows: 2 }, { regulators: source });
		const clipped = {
			...plan,
			straps: [plan.straps[0], { ...plan.straps[1], region: rectangle(5, -50, 25, 50) }]
		};
		expect(nodesOn(meshOf(clipped), 1)).toEqual([
			[10, 0],
			[10, 10],
			[20, 0],
			[20, 10]
		]);
	});

	test('a slanted die edge ends a strap on the nearest nanometre', () => {
		const plan = planOf({
			die: {
				outline: [
					[0, 0],
					[30, 0],
					[0, 10]
				]
			},
			layers: [{ id: 'm1', direction: 'horizontal', sheetOhm: 1 }],
			nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
			straps: [{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: 7, widthUm: 1, offsetUm: 7 }],
			feeds: [{ id: 'f', net: 'vdd', xUm: 0, yUm: 7, seriesOhm: 0 }],
			mesh: { maxSegmentUm: 100 }
		});
		// At y = 7 the edge stands at x = 9; the line at y = 0 runs along the whole lower edge.
		const network = meshOf(plan);
		expect(nodesOn(network, 0)).toEqual([
			[0, 7],
			[9, 7]
		]);
		expect(network.leftOutNodes).toBe(2);
	});

	test('a strap keep-out cuts the layers it names and no others', () => {
		const plan = latticePlan({ columns: 3, rows: 3 }, { regulators: source });
		const cut = {
			...plan,
			keepouts: [
				{ id: 'k', outline: rectangle(3, -1, 6, 1), forbids: ['straps' as const], layers: ['m1'] }
			]
		};
		// The bottom strap loses its piece from 3 to 6 um, so two ends more.
		expect(nodesOn(meshOf(cut), 0).slice(0, 5)).toEqual([
			[0, 0],
			[3, 0],
			[6, 0],
			[10, 0],
			[20, 0]
		]);
		expect(nodesOn(meshOf(cut), 1)).toEqual(nodesOn(meshOf(plan), 1));
		const other = { ...cut, keepouts: [{ ...cut.keepouts[0], layers: ['m2'] }] };
		expect(nodesOn(meshOf(other), 0)).toEqual(nodesOn(meshOf(plan), 0));
		const regulatorsOnly = {
			...cut,
			keepouts: [{ ...cut.keepouts[0], forbids: ['regulators' as const] }]
		};
		expect(nodesOn(meshOf(regulatorsOnly), 0)).toEqual(nodesOn(meshOf(plan), 0));
	});

	test('a keep-out that only touches a strap with a corner does not cut it', () => {
		const plan = latticePlan({ columns: 3, rows: 3 }, { regulators: source });
		const touching = {
			...plan,
			keepouts: [
				{
					id: 'k',
					outline: [
						[5, 0],
						[8, -4],
						[2, -4]
					] as [number, number][],
					forbids: ['straps' as const]
				}
			]
		};
		expect(nodesOn(meshOf(touching), 0)).toEqual(nodesOn(meshOf(plan), 0));
	});
});

describe('via rules that skip a layer', () => {
	/** Straps on m1 (along x) and m4 (along y), a stack between them, and whatever else is given. */
	function stackPlan(middle: boolean): Floorplan {
		return planOf({
			die: { outline: rectangle(0, 0, 20, 20) },
			layers: (['m1', 'm2', 'm3', 'm4'] as const).map((id, l) => ({
				id,
				direction: l % 2 === 0 ? ('horizontal' as const) : ('vertical' as const),
				sheetOhm: 1
			})),
			vias: [
				{ id: 'stack', lower: 'm1', upper: 'm4', ohmPerCut: 5, cutsPerUm2: 0 },
				{ id: 'v12', lower: 'm1', upper: 'm2', ohmPerCut: 1, cutsPerUm2: 0 },
				{ id: 'v23', lower: 'm2', upper: 'm3', ohmPerCut: 1, cutsPerUm2: 0 },
				{ id: 'v34', lower: 'm3', upper: 'm4', ohmPerCut: 1, cutsPerUm2: 0 }
			],
			nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
			straps: [
				{ id: 'a', net: 'vdd', layer: 'm1', pitchUm: 100, widthUm: 1, offsetUm: 5 },
				{ id: 'd', net: 'vdd', layer: 'm4', pitchUm: 100, widthUm: 1, offsetUm: 5 },
				...(middle
					? [
							{ id: 'b', net: 'vdd', layer: 'm2', pitchUm: 100, widthUm: 1, offsetUm: 15 },
							{ id: 'c', net: 'vdd', layer: 'm3', pitchUm: 100, widthUm: 1, offsetUm: 15 }
						]
					: [])
			],
			feeds: [{ id: 'f', net: 'vdd', xUm: 5, yUm: 20, seriesOhm: 1 }]
		});
	}

	test('it joins the outer layers of a net without a strap between', () => {
		const network = meshOf(stackPlan(false));
		expect(ohms(network, RESISTOR_VIA)).toEqual([5]);
		expect(network.resistors.layer.at(-1)).toBe(0);
	});

	test('it does not apply where the net has straps of its own between', () => {
		const network = meshOf(stackPlan(true));
		// m1 x m2 at (15, 5), m2 x m3 at (15, 15), m3 x m4 at (5, 15); never m1 x m4 at (5, 5).
		expect(ohms(network, RESISTOR_VIA)).toEqual([1, 1, 1]);
	});
});

describe('division of long pieces', () => {
	test('a strap without crossings has 40 equal pieces', () => {
		const network = meshOf(ladderPlan({ totalOhm: 2 }, { regulators: source }));
		expect(network.nodes.count).toBe(41);
		for (const ohm of network.resistors.nominalOhm) expect(ohm).toBeCloseTo(0.05, 14);
	});

	test('a net with crossings is not divided by default', () => {
		const network = meshOf(latticePlan({ columns: 2, rows: 2 }, { regulators: source }));
		expect(network.nodes.count).toBe(8);
	});

	test('maxSegmentUm divides the pieces of every net that are longer', () => {
		const network = meshOf(
			latticePlan({ columns: 2, rows: 2 }, { regulators: source, mesh: { maxSegmentUm: 4 } })
		);
		// 10 um in three parts of 3.333 um, on whole nanometres.
		expect(nodesOn(network, 0).slice(0, 4)).toEqual([
			[0, 0],
			[3.333, 0],
			[6.667, 0],
			[10, 0]
		]);
		const exact = meshOf(
			latticePlan({ columns: 2, rows: 2 }, { regulators: source, mesh: { maxSegmentUm: 5 } })
		);
		expect(nodesOn(exact, 0).slice(0, 3)).toEqual([
			[0, 0],
			[5, 0],
			[10, 0]
		]);
	});
});

describe('overlaps and plans that are too large', () => {
	test('overlapping straps of one net stay separate conductors, with a warning', () => {
		const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
		const doubled = {
			...plan,
			straps: [...plan.straps, { ...plan.straps[0], id: 'h2' }]
		};
		const network = meshOf(doubled);
		expect(network.nodes.count).toBe(12);
		expect(ohms(network, RESISTOR_VIA)).toHaveLength(8);
		expect(network.warnings).toEqual([
			{
				code: 'strap-overlap',
				message:
					'straps of h and h2 overlap on m1 in 2 places; they are taken as separate conductors',
				subject: 'h',
				atUm: [5, 0]
			}
		]);
		expect(network.shorts).toEqual([]);
	});

	test('straps of two nets that overlap are a short; straps that touch are not', () => {
		function withGroundAt(offsetUm: number): Floorplan {
			const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
			return {
				...plan,
				nets: [...plan.nets, { id: 'gnd', kind: 'ground', volts: 0, groundReference: 'local' }],
				straps: [...plan.straps, { ...plan.straps[0], id: 'g', net: 'gnd', offsetUm }],
				feeds: [{ id: 'f', net: 'gnd', xUm: 0, yUm: 0, seriesOhm: 1 }]
			};
		}
		expect(meshOf(withGroundAt(0.9)).shorts).toEqual([
			{ layer: 'm1', nets: ['vdd', 'gnd'], straps: ['h', 'g'], count: 1, atUm: [5, 0.45] }
		]);
		expect(meshOf(withGroundAt(1)).shorts).toEqual([]);
	});

	test('a pattern that draws nothing is a warning', () => {
		const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
		const empty = { ...plan.straps[0], id: 'far', region: rectangle(50, 50, 60, 60) };
		expect(meshOf({ ...plan, straps: [...plan.straps, empty] }).warnings).toMatchObject([
			{ code: 'strap-empty', subject: 'far' }
		]);
	});

	test('a mistyped pitch is refused with the number of straps', () => {
		const plan = latticePlan({ columns: 2, rows: 2 }, { regulators: source });
		const tooFine = {
			...plan,
			die: { outline: rectangle(0, 0, 10_000, 10_000) },
			straps: [{ ...plan.straps[0], pitchUm: 0.001 }]
		};
		expect(meshFloorplan(tooFine)).toEqual({
			status: 'refused',
			problems: [
				{
					path: 'straps (h)',
					message:
						'draws 10000001 straps, which with the other patterns is more than 2000000 ' +
						'(expected a larger pitch or a smaller region)',
					subject: 'h'
				}
			]
		});
		const tooLong = ladderPlan({ lengthUm: 100_000 }, { mesh: { maxSegmentUm: 0.001 } });
		expect(meshFloorplan(tooLong)).toMatchObject({
			status: 'refused',
			problems: [{ path: 'straps' }]
		});
	});
});
