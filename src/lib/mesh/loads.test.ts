import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Block, Floorplan } from '#lib/floorplan/index.ts';
import { NM_PER_UM } from '#lib/floorplan/index.ts';
import { latticePlan, rectangle, regulatorAt } from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import type { Network } from './index.ts';

function lattice(columns: number, rows: number, block: Partial<Block>): Floorplan {
	return latticePlan(
		{ columns, rows },
		{
			regulators: [regulatorAt('r', 'vdd', 0, 0)],
			blocks: [
				{ id: 'b', net: 'vdd', outline: rectangle(0, 0, 1, 1), amps: { default: 1 }, ...block }
			]
		}
	);
}

/** Shares of a block by the place of the node, `x,y` in um. */
function sharesOf({ loads, nodes }: Network, block = 0): Record<string, number> {
	return Object.fromEntries(
		Array.from(loads.share, (share, l) => {
			const node = loads.node[l];
			const place = `${nodes.xNm[node] / NM_PER_UM},${nodes.yNm[node] / NM_PER_UM}`;
			return [place, share, loads.block[l]] as const;
		})
			.filter(([, , owner]) => owner === block)
			.map(([place, share]) => [place, share])
	);
}

function expectShares(plan: Floorplan, expected: Record<string, number>): void {
	const shares = sharesOf(meshOf(plan));
	expect(Object.keys(shares).sort()).toEqual(Object.keys(expected).sort());
	for (const [place, share] of Object.entries(expected)) {
		expect(shares[place]).toBeCloseTo(share, 14);
	}
}

describe('uniform blocks', () => {
	test('a block over the whole of the inner cells loads their nodes alike', () => {
		expectShares(lattice(4, 4, { outline: rectangle(5, 5, 25, 25) }), {
			'10,10': 1 / 4,
			'20,10': 1 / 4,
			'10,20': 1 / 4,
			'20,20': 1 / 4
		});
	});

	test('shares are the areas of the block in each cell', () => {
		// Cells of 10 um x 10 um around (10, 10), (20, 10): 2 um and 6 um wide, both 3 um high.
		expectShares(lattice(4, 4, { outline: rectangle(13, 8, 21, 11) }), {
			'10,10': 2 / 8,
			'20,10': 6 / 8
		});
		// Across the border of two straps at y = 15: 2 um below, 1 um above.
		expectShares(lattice(4, 4, { outline: rectangle(8, 13, 12, 16) }), {
			'10,10': 2 / 3,
			'10,20': 1 / 3
		});
	});

	test('the cell of an end node reaches from half way to the end of its strap', () => {
		// Row y = 10: the cell of x = 0 is 0 to 5 um, of x = 10 it is 5 to 15 um.
		expectShares(lattice(3, 3, { outline: rectangle(0, 9, 15, 11) }), {
			'0,10': 1 / 3,
			'10,10': 2 / 3
		});
	});

	test('an L-shaped block counts only what it covers', () => {
		// 20 um x 10 um at the bottom and 10 um x 10 um above its left half.
		expectShares(
			lattice(4, 4, {
				outline: [
					[5, 5],
					[25, 5],
					[25, 15],
					[15, 15],
					[15, 25],
					[5, 25]
				]
			}),
			{ '10,10': 1 / 3, '20,10': 1 / 3, '10,20': 1 / 3 }
		);
	});

	test('a block with slanted edges counts the area within each cell', () => {
		// A right triangle of legs 20 um over four cells: 3/4 of two cells... by hand: the lower left
		// cell is whole (100 of 200 um2), its right and upper neighbours are halves (50 each).
		expectShares(
			lattice(4, 4, {
				outline: [
					[5, 5],
					[25, 5],
					[5, 25]
				]
			}),
			{ '10,10': 1 / 2, '20,10': 1 / 4, '10,20': 1 / 4 }
		);
	});

	test('a tap divides the cell that it stands in', () => {
		const plan = lattice(3, 3, { outline: rectangle(5, 9, 15, 11) });
		const tapped = { ...plan, regulators: [{ ...plan.regulators[0], xUm: 12, yUm: 9 }] };
		// The pin at x = 13 on row y = 10: cells 5 to 11.5 and 11.5 to 16.5 um of the block's 5 to 15.
		expectShares(tapped, { '10,10': 0.65, '13,10': 0.35 });
	});

	test('a block over no cell goes to the nearest node, with a warning', () => {
		const plan = lattice(3, 3, { outline: rectangle(0, 0, 2, 2) });
		const lifted = {
			...plan,
			straps: [{ ...plan.straps[0], region: rectangle(-1, 9, 21, 21) }, plan.straps[1]]
		};
		const network = meshOf(lifted);
		expect(sharesOf(network)).toEqual({ '0,10': 1 });
		expect(network.warnings).toEqual([
			{
				code: 'block-off-straps',
				message:
					'blocks (b): it covers no cell of a node of net vdd on m1, so all its current goes to the nearest node',
				subject: 'b',
				atUm: [1, 1]
			}
		]);
	});

	test('a block that never draws is spread like any other', () => {
		expectShares(lattice(4, 4, { outline: rectangle(8, 8, 9, 9), amps: {} }), { '10,10': 1 });
	});
});

describe('current maps', () => {
	test('weights lie row by row from the lower left over the bounding box', () => {
		expectShares(
			lattice(4, 4, {
				outline: rectangle(5, 5, 25, 25),
				spread: { kind: 'map', columns: 2, rows: 2, weights: [4, 1, 3, 0] }
			}),
			{ '10,10': 4 / 8, '20,10': 1 / 8, '10,20': 3 / 8 }
		);
	});

	test('a coarse map is even within its cells, a fine one is summed', () => {
		expectShares(
			lattice(4, 4, {
				outline: rectangle(5, 5, 25, 15),
				spread: { kind: 'map', columns: 1, rows: 1, weights: [5] }
			}),
			{ '10,10': 1 / 2, '20,10': 1 / 2 }
		);
		// Four columns of 5 um: two in each cell.
		expectShares(
			lattice(4, 4, {
				outline: rectangle(5, 5, 25, 15),
				spread: { kind: 'map', columns: 4, rows: 1, weights: [1, 2, 3, 4] }
			}),
			{ '10,10': 3 / 10, '20,10': 7 / 10 }
		);
	});
});

describe('local ground', () => {
	test('loads return into the nearest ground node of the lowest layer, ties to the lowest index', () => {
		const plan = lattice(3, 3, { outline: rectangle(5, 5, 15, 15) });
		const grounded: Floorplan = {
			...plan,
			nets: [...plan.nets, { id: 'gnd', kind: 'ground', volts: 0, groundReference: 'local' }],
			straps: [
				...plan.straps,
				{ id: 'gh', net: 'gnd', layer: 'm1', pitchUm: 10, widthUm: 1, offsetUm: 5 },
				{ id: 'gv', net: 'gnd', layer: 'm2', pitchUm: 20, widthUm: 1, offsetUm: 3 }
			],
			feeds: [{ id: 'f', net: 'gnd', xUm: 3, yUm: 5, seriesOhm: 0.1 }]
		};
		const network = meshOf(grounded);
		const { nodes, loads } = network;
		const place = (node: number) => [
			nodes.xNm[node] / NM_PER_UM,
			nodes.yNm[node] / NM_PER_UM,
			nodes.layer[node]
		];
		// Ground rows at y = 5 and 15 have nodes at x = 0, 1 (the pin of r), 3, 20. From (10, 10) the
		// nearest are (3, 5) and (3, 15), equally far: the row at 5 comes first.
		expect(loads.count).toBe(1);
		expect(place(loads.node[0])).toEqual([10, 10, 0]);
		expect(place(loads.groundNode[0])).toEqual([3, 5, 0]);
		expect(nodes.localGround[loads.node[0]]).toBe(loads.groundNode[0]);
		const ground = network.nets.findIndex(({ id }) => id === 'gnd');
		nodes.localGround.forEach((local, node) => {
			expect(local === -1).toBe(nodes.net[node] === ground);
		});
	});

	test('every node has the ground node that a search of all of them finds', () => {
		fc.assert(
			fc.property(
				fc.record({
					offsetUm: fc.integer({ min: 0, max: 9 }),
					pitchUm: fc.integer({ min: 3, max: 14 }),
					direction: fc.constantFrom('m1', 'm2'),
					keepUm: fc.integer({ min: 4, max: 30 })
				}),
				({ offsetUm, pitchUm, direction, keepUm }) => {
					const plan = lattice(5, 4, { amps: {} });
					const network = meshOf({
						...plan,
						nets: [...plan.nets, { id: 'gnd', kind: 'ground', volts: 0, groundReference: 'local' }],
						straps: [
							...plan.straps,
							{ id: 'g1', net: 'gnd', layer: direction, pitchUm, widthUm: 1, offsetUm },
							{
								id: 'g2',
								net: 'gnd',
								layer: direction === 'm1' ? 'm2' : 'm1',
								pitchUm: 11,
								widthUm: 1,
								offsetUm: 2
							}
						],
						feeds: [{ id: 'f', net: 'gnd', xUm: 3, yUm: 5, seriesOhm: 0.1 }],
						keepouts: [
							{
								id: 'k',
								outline: rectangle(keepUm, 6, keepUm + 5, 17),
								forbids: ['straps']
							}
						]
					});
					const { nodes, nets } = network;
					const ground = nets[1];
					for (let node = 0; node < ground.firstNode; node++) {
						let best = Infinity;
						let nearest = -1;
						for (let g = ground.firstNode; g < nodes.count; g++) {
							if (nodes.layer[g] !== ground.lowestLayer) continue;
							const dx = nodes.xNm[g] - nodes.xNm[node];
							const dy = nodes.yNm[g] - nodes.yNm[node];
							if (dx * dx + dy * dy < best) {
								best = dx * dx + dy * dy;
								nearest = g;
							}
						}
						expect(nodes.localGround[node]).toBe(nearest);
					}
				}
			),
			{ numRuns: 40 }
		);
	});
});

describe('conservation', () => {
	const corner = fc.integer({ min: 0, max: 60_000 }).map((nm) => nm / NM_PER_UM);

	test('the shares of every block sum to 1 within 1e-12', () => {
		fc.assert(
			fc.property(
				fc.tuple(corner, corner, corner, corner).filter(([x1, y1, x2, y2]) => x1 < x2 && y1 < y2),
				fc.constantFrom('uniform', 'map', 'triangle'),
				fc.array(fc.double({ min: 0.001, max: 1000, noNaN: true }), {
					minLength: 12,
					maxLength: 12
				}),
				([x1, y1, x2, y2], shape, weights) => {
					const plan = lattice(7, 7, {
						outline:
							shape === 'triangle'
								? [
										[x1, y1],
										[x2, y1],
										[x1, y2]
									]
								: rectangle(x1, y1, x2, y2),
						spread: shape === 'map' ? { kind: 'map', columns: 4, rows: 3, weights } : 'uniform'
					});
					const { loads } = meshOf(plan);
					expect(loads.count).toBeGreaterThan(0);
					let sum = 0;
					for (const share of loads.share) {
						expect(share).toBeGreaterThan(0);
						sum += share;
					}
					expect(Math.abs(sum - 1)).toBeLessThanOrEqual(1e-12);
				}
			),
			{ numRuns: 300 }
		);
	});
});
