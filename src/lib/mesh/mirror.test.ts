import fc from 'fast-check';
import { expect, test } from 'vitest';
import type { Floorplan, PointUm } from '#lib/floorplan/index.ts';
import { cellOf, feedAt, planOf, rectangle } from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import type { Network } from './index.ts';

const WIDTH_UM = 90;

function mirrorOutline(outline: readonly PointUm[]): PointUm[] {
	return outline.map(([x, y]): PointUm => [WIDTH_UM - x, y]).reverse();
}

/** The plan as a mirror at the vertical middle of the die shows it. */
function mirrored(plan: Floorplan): Floorplan {
	const cell = plan.cells[0];
	return {
		...plan,
		die: { outline: mirrorOutline(plan.die.outline) },
		straps: plan.straps.map((strap) => ({
			...strap,
			offsetUm: strap.layer === 'm2' ? WIDTH_UM - strap.offsetUm : strap.offsetUm,
			...(strap.region === undefined ? {} : { region: mirrorOutline(strap.region) })
		})),
		feeds: plan.feeds.map((feed) => ({ ...feed, xUm: WIDTH_UM - feed.xUm })),
		regulators: plan.regulators.map((unit) => ({
			...unit,
			xUm: WIDTH_UM - unit.xUm - cell.widthUm,
			orient: 'MY'
		})),
		blocks: plan.blocks.map((block) => ({ ...block, outline: mirrorOutline(block.outline) })),
		keepouts: plan.keepouts.map((keepout) => ({
			...keepout,
			outline: mirrorOutline(keepout.outline)
		}))
	};
}

/** The network without its numbering: what stands where, with `flip` as a mirror shows it. */
function described({ nodes, resistors, loads, regulators, feeds }: Network, flip: boolean) {
	const place = (node: number) =>
		node < 0
			? 'none'
			: [
					nodes.net[node],
					nodes.layer[node],
					flip ? WIDTH_UM * 1000 - nodes.xNm[node] : nodes.xNm[node],
					nodes.yNm[node]
				].join(' ');
	return {
		nodes: Array.from({ length: nodes.count }, (_, node) => place(node)).sort(),
		resistors: Array.from(resistors.nominalOhm, (ohm, r) =>
			[
				[place(resistors.from[r]), place(resistors.to[r])].sort().join(' - '),
				ohm.toPrecision(12)
			].join(': ')
		).sort(),
		loads: Array.from(loads.share, (share, l) =>
			[loads.block[l], place(loads.node[l]), share.toPrecision(9)].join(': ')
		).sort(),
		pins: Array.from(regulators.outputNode, (node, r) => [
			place(node),
			place(regulators.inputNode[r])
		]),
		feeds: Array.from(feeds.node, place)
	};
}

test('the mirrored plan gives the mirrored network', () => {
	const um = (min: number, max: number) => fc.integer({ min, max });
	fc.assert(
		fc.property(
			fc.record({
				pitchX: um(5, 17),
				pitchY: um(5, 17),
				offsetX: um(0, 5),
				offsetY: um(0, 5),
				keep: fc.tuple(um(10, 40), um(5, 20), um(3, 30), um(3, 20)),
				// Larger than the keep-out, so that it always meets cells and never a tie of nearest nodes.
				block: fc.tuple(um(0, 40), um(0, 20), um(31, 50), um(21, 39)),
				unit: fc.tuple(um(1, 80), um(1, 50)),
				cornerUm: um(1, 20),
				isSlanted: fc.boolean()
			}),
			({ pitchX, pitchY, offsetX, offsetY, keep, block, unit, cornerUm, isSlanted }) => {
				const [kx, ky, kw, kh] = keep;
				const [bx, by, bw, bh] = block;
				const blockOutline: PointUm[] = isSlanted
					? [
							[bx, by],
							[bx + bw, by],
							[bx, by + bh]
						]
					: rectangle(bx, by, bx + bw, by + bh);
				const plan = planOf({
					// A die with a slanted corner, off the grid of everything else.
					die: {
						outline: [
							[0, 0],
							[WIDTH_UM, 0],
							[WIDTH_UM, 60 - cornerUm],
							[WIDTH_UM - 2 * cornerUm, 60],
							[0, 60]
						]
					},
					layers: [
						{ id: 'm1', direction: 'horizontal', sheetOhm: 0.1 },
						{ id: 'm2', direction: 'vertical', sheetOhm: 0.05 },
						{ id: 'm3', direction: 'horizontal', sheetOhm: 0.02 }
					],
					vias: [
						{ id: 'v', lower: 'm1', upper: 'm2', ohmPerCut: 3, cutsPerUm2: 2 },
						{ id: 'w', lower: 'm2', upper: 'm3', ohmPerCut: 1, cutsPerUm2: 1 }
					],
					nets: [
						{ id: 'vin', kind: 'input', volts: 1.2 },
						{ id: 'vdd', kind: 'regulated', volts: 1 }
					],
					straps: [
						{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: pitchY, widthUm: 2, offsetUm: offsetY },
						{ id: 'v', net: 'vdd', layer: 'm2', pitchUm: pitchX, widthUm: 1, offsetUm: offsetX },
						{
							id: 'i',
							net: 'vin',
							layer: 'm2',
							pitchUm: 19,
							widthUm: 1,
							offsetUm: 0.5,
							region: rectangle(10, 0, 80, 60)
						},
						{ id: 'ih', net: 'vin', layer: 'm3', pitchUm: 29, widthUm: 1, offsetUm: 2.5 }
					],
					feeds: [feedAt('f', 'vin', 31.3, 22.1, 0.1)],
					cells: [
						cellOf('unit', {
							widthUm: 6,
							heightUm: 4,
							pins: { output: [1.3, 1.7], input: [4.1, 3.3] }
						})
					],
					regulators: [
						{ id: 'r', cell: 'unit', input: 'vin', output: 'vdd', xUm: unit[0], yUm: unit[1] }
					],
					blocks: [{ id: 'b', net: 'vdd', outline: blockOutline, amps: {} }],
					keepouts: [
						{
							id: 'k',
							outline: rectangle(kx, ky, kx + kw, ky + kh),
							forbids: ['straps'],
							layers: ['m1']
						}
					]
				});
				const network = meshOf(plan);
				expect(described(meshOf(mirrored(plan)), true)).toEqual(described(network, false));
			}
		),
		{ numRuns: 100 }
	);
});
