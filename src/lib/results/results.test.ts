import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Floorplan, FloorplanInput } from '#lib/floorplan/index.ts';
import {
	cellOf,
	feedAt,
	latticePlan,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { meshOf, outcomeOf, solved } from '../../../tests/support/solving.ts';
import {
	buildDropMap,
	decodeDropMap,
	encodeDropMap,
	nodesCsv,
	resultFileSchema,
	type DropMap
} from './index.ts';
import { localMaxima } from './spots.ts';

type Limits = NonNullable<FloorplanInput['limits']>;

/** A lattice rail with two units at its left edge and a heavy block at its right one. */
function rail(limits: Limits = {}, parts: Partial<FloorplanInput> = {}): Floorplan {
	return latticePlan(
		{ columns: 9, rows: 5, bondOhm: 0.05, viaOhm: 0.01 },
		{
			limits,
			cells: [cellOf('unit', { outputOhm: 0.05, maxA: 0.4, minA: 0.05 })],
			regulators: [
				regulatorAt('r1', 'vdd', 10, 10, { offsetV: 0.005 }),
				regulatorAt('r2', 'vdd', 10, 30)
			],
			blocks: [loadAt('near', 'vdd', 10, 20, 0.05), loadAt('far', 'vdd', 80, 20, 0.3)],
			...parts
		}
	);
}

function mapOf(plan: Floorplan, net = 'vdd'): DropMap {
	const network = meshOf(plan);
	const outcome = outcomeOf(plan, network);
	if (outcome.status !== 'solved') throw new Error(JSON.stringify(outcome));
	const map = buildDropMap(plan, network, outcome.point, net);
	if (map === null) throw new Error('the net has no nodes');
	return map;
}

describe('buildResult', () => {
	it('is a valid result file that survives JSON', () => {
		const { result } = solved(rail());
		expect(resultFileSchema.parse(JSON.parse(JSON.stringify(result)))).toEqual(result);
	});

	it('finds the worst place of the net in the far block', () => {
		const { result } = solved(rail());
		const [net] = result.nets;
		expect(net.worst).toEqual({ xUm: 80, yUm: 20, layer: 'm1', block: 'far' });
		expect(net.worstDropV).toBeCloseTo(1 - net.minV, 14);
		expect(result.blocks[1].atUm).toEqual([80, 20]);
		expect(result.blocks[1].worstDropV).toBe(net.worstDropV);
		expect(result.spots[0]).toMatchObject({ net: 'vdd', xUm: 80, yUm: 20, block: 'far' });
	});

	it('lists the ledger in the order of the file', () => {
		const { result, ampsOf } = solved(rail());
		expect(result.regulators.map(({ id }) => id)).toEqual(['r1', 'r2']);
		const [r1] = result.regulators;
		expect(r1.amps).toBe(ampsOf('r1'));
		expect(r1.loadFraction).toBeCloseTo(r1.amps / 0.4, 14);
		expect(r1.setV).toBeCloseTo(1.005, 14);
		expect(r1.inV).toBeNull();
		expect(r1.headroomV).toBeNull();
		expect(r1.lossW).toBeCloseTo(0.05 * r1.amps ** 2, 12);
	});

	it('headroom and loss of a unit with an input net follow their definitions', () => {
		const plan = planOf({
			die: { outline: rectangle(0, -5, 100, 15) },
			layers: [{ id: 'm1', direction: 'horizontal', sheetOhm: 0.001 }],
			nets: [
				{ id: 'vdd', kind: 'regulated', volts: 1 },
				{ id: 'vin', kind: 'input', volts: 1.4 },
				{ id: 'gnd', kind: 'ground', volts: 0 }
			],
			straps: [
				{ id: 's', net: 'vdd', layer: 'm1', pitchUm: 100, widthUm: 1, offsetUm: 0 },
				{ id: 'i', net: 'vin', layer: 'm1', pitchUm: 100, widthUm: 1, offsetUm: 5 },
				{ id: 'g', net: 'gnd', layer: 'm1', pitchUm: 100, widthUm: 1, offsetUm: 10 }
			],
			feeds: [feedAt('f', 'vin', 0, 5, 0.1, { maxA: 0.2 }), feedAt('g', 'gnd', 0, 10, 0.05)],
			cells: [cellOf('unit', { onOhm: 0.5, quiescentA: 0.01 })],
			regulators: [regulatorAt('r', 'vdd', 50, 0, { input: 'vin' })],
			blocks: [loadAt('load', 'vdd', 100, 0, 0.3)],
			limits: { feedLoad: 1, riseV: 0.01 }
		});
		const { result } = solved(plan);
		const [unit] = result.regulators;
		const { inV, outV, gndV } = unit;
		if (inV === null || outV === null) throw new Error('the unit has an input and an output');
		expect(unit.headroomV).toBeCloseTo(inV - outV - 0.5 * unit.amps, 14);
		expect(unit.lossW).toBeCloseTo((inV - outV) * unit.amps + (inV - gndV) * 0.01, 13);
		// Feed currents are positive in their usual direction, also out of the ground net.
		expect(result.feeds.map(({ amps }) => amps)).toEqual([
			expect.closeTo(0.31, 10),
			expect.closeTo(0.31, 10)
		]);
		expect(result.feeds[1].loadFraction).toBeNull();
		expect(result.findings.map(({ kind, subject }) => [kind, subject])).toEqual([
			['rise', 'gnd'],
			['feed-load', 'f']
		]);
		const { power } = result;
		expect(power.inputW).toBeCloseTo(1.4 * 0.31, 10);
		expect(power.efficiency).toBeCloseTo(power.loadW / power.inputW, 14);
		const parts = power.loadW + power.regulatorW + power.gridW + power.feedW;
		expect(parts).toBeCloseTo(power.inputW, 12);
		expect(power.nets.find(({ id }) => id === 'vin')?.feedW).toBeCloseTo(0.1 * 0.31 ** 2, 10);
	});
});

describe('findings', () => {
	const kinds = (limits: Limits, parts?: Partial<FloorplanInput>) =>
		solved(rail(limits, parts)).result.findings.map(({ kind, list, subject }) =>
			[kind, list, subject].join(' ')
		);

	it('a plan without limits has none', () => {
		expect(kinds({})).toEqual([]);
	});

	it.each<[string, Limits, string[]]>([
		['drop', { dropV: 0.03 }, ['drop nets vdd', 'drop blocks far']],
		['rise', { riseV: 0 }, []],
		['regulator load', { regulatorLoad: 0.45 }, ['regulator-load regulators r1']],
		['sharing', { sharingSpread: 0.2 }, ['sharing-spread nets vdd']]
	])('%s', (_name, limits, expected) => {
		expect(kinds(limits)).toEqual(expected);
	});

	it('an override on a block wins over one on its net, which wins over the plan', () => {
		const overrides = { nets: { vdd: { dropV: 0.5 } }, blocks: { near: { dropV: 0.001 } } };
		expect(kinds({ dropV: 0.001, overrides })).toEqual(['drop blocks near']);
	});

	it('a unit below its stable minimum is a finding only where asked', () => {
		const parts = { blocks: [loadAt('far', 'vdd', 10, 10, 0.06)] };
		expect(kinds({ belowMinA: 'allow' }, parts)).toEqual([]);
		expect(kinds({ belowMinA: 'flag' }, parts)).toEqual(['below-min-current regulators r2']);
	});

	it('straps and vias beyond their metal are found once per pattern and rule', () => {
		const plain = rail();
		const plan = {
			...plain,
			limits: { strapLoad: 1, viaLoad: 1 },
			layers: plain.layers.map((layer) => ({ ...layer, maxMaPerUm: 20 })),
			vias: plain.vias.map((via) => ({ ...via, maxMaPerCut: 30 }))
		};
		const { result } = solved(plan);
		const found = result.findings.map(({ kind, subject }) => `${kind} ${subject}`);
		expect(found).toEqual(['strap-load h', 'strap-load v', 'via-load v1']);
		const loads = result.straps.worst.map(({ loadFraction }) => loadFraction);
		expect(loads).toEqual([...loads].sort((a, b) => b - a));
		expect(result.straps.worst[0].limitA).toBeCloseTo(0.02, 14);
		expect(result.findings[0].value).toBe(
			Math.max(
				...result.straps.worst.filter(({ strap }) => strap === 'h').map((s) => s.loadFraction)
			)
		);
	});

	it('a regulator that stands where it may not is solved and found', () => {
		const found = kinds({}, { sites: { originUm: [0, 0], pitchUm: [5, 5] } });
		expect(found).toEqual(['placement regulators r1', 'placement regulators r2']);
	});

	it('a limit that is met exactly is not broken', () => {
		const { result } = solved(rail());
		const exact = result.blocks[1].worstDropV;
		expect(kinds({ dropV: exact })).toEqual([]);
	});
});

describe('localMaxima', () => {
	it('agrees with the definition, node by node', () => {
		const node = fc.record({
			x: fc.integer({ min: 0, max: 400 }),
			y: fc.integer({ min: 0, max: 400 }),
			value: fc.integer({ min: 0, max: 30 })
		});
		fc.assert(
			fc.property(
				fc.array(node, { minLength: 1, maxLength: 80 }),
				fc.integer({ min: 10, max: 200 }),
				(nodes, apart) => {
					const found = localMaxima(
						Int32Array.from(nodes.keys()),
						Int32Array.from(nodes, ({ x }) => x),
						Int32Array.from(nodes, ({ y }) => y),
						(i) => nodes[i].value,
						apart
					);
					const expected = nodes.flatMap((here, i) => {
						const exceeded = nodes.some(
							(there, j) =>
								(there.value > here.value || (there.value === here.value && j < i)) &&
								Math.hypot(there.x - here.x, there.y - here.y) < apart
						);
						return exceeded ? [] : [i];
					});
					expect([...found].sort((a, b) => a - b)).toEqual(expected);
				}
			)
		);
	});
});

describe('drop map', () => {
	it('holds the value of the nearest node, half a pitch around every strap', () => {
		const plan = rail();
		const { voltageAt } = solved(plan);
		const map = mapOf(plan);
		// Nodes every 10 um: cells of 5 um, so 16 x 8 of them.
		expect([map.columns, map.rows, map.cellNm]).toEqual([16, 8, 5000]);
		expect([map.originXNm, map.originYNm]).toEqual([0, 0]);
		for (let row = 0; row < map.rows; row++) {
			for (let column = 0; column < map.columns; column++) {
				const x = 10 * Math.round((5 * column + 2.5) / 10);
				const y = 10 * Math.round((5 * row + 2.5) / 10);
				const cell = row * map.columns + column;
				expect(map.dropV[cell]).toBeCloseTo(1 - voltageAt('vdd', x, y), 6);
				expect(map.netDropV[cell]).toBe(map.dropV[cell]);
				expect(map.groundRiseV[cell]).toBe(0);
			}
		}
	});

	it('is empty outside the die and where no strap reaches', () => {
		const plan = rail(
			{},
			{
				die: {
					outline: [
						[0, 0],
						[80, 0],
						[80, 20],
						[40, 20],
						[40, 40],
						[0, 40]
					]
				},
				regulators: [regulatorAt('r1', 'vdd', 0, 0)],
				blocks: [loadAt('near', 'vdd', 10, 10, 0.05)],
				straps: [
					{
						id: 'h',
						net: 'vdd',
						layer: 'm1',
						pitchUm: 10,
						widthUm: 1,
						offsetUm: 0,
						region: rectangle(0, 0, 60, 40)
					},
					{ id: 'v', net: 'vdd', layer: 'm2', pitchUm: 10, widthUm: 1, offsetUm: 0 }
				]
			}
		);
		const map = mapOf(plan);
		const at = (xUm: number, yUm: number) =>
			map.dropV[Math.floor(yUm / 5) * map.columns + Math.floor(xUm / 5)];
		expect(at(20, 30)).not.toBeNaN();
		expect(at(50, 10)).not.toBeNaN();
		expect(at(62, 10)).toBeNaN();
		expect(at(60, 30)).toBeNaN();
	});

	it('never has more than 400 cells along a side', () => {
		const map = mapOf(
			latticePlan(
				{ columns: 41, rows: 3, pitchUm: 1000, viaOhm: 0.01 },
				{
					regulators: [
						{ ...regulatorAt('r', 'vdd', 500.01, 0) },
						regulatorAt('s', 'vdd', 500.5, 0)
					],
					blocks: [loadAt('load', 'vdd', 3000, 0, 0.1)]
				}
			)
		);
		expect(map.columns).toBe(400);
		expect(map.rows).toBe(20);
	});

	it('survives encoding, empty cells included', () => {
		const map = mapOf(rail());
		const holed = { ...map, dropV: map.dropV.map((value, cell) => (cell % 7 === 0 ? NaN : value)) };
		const bytes = encodeDropMap(holed);
		expect(decodeDropMap(bytes)).toEqual(holed);
		// Also out of the middle of a larger buffer, at an odd offset.
		const padded = new Uint8Array(bytes.length + 3);
		padded.set(bytes, 3);
		expect(decodeDropMap(padded.subarray(3))).toEqual(holed);
	});

	it('refuses bytes that are something else', () => {
		const bytes = encodeDropMap(mapOf(rail()));
		expect(decodeDropMap(bytes.subarray(0, bytes.length - 1))).toBeNull();
		expect(decodeDropMap(bytes.subarray(0, 10))).toBeNull();
		const other = bytes.slice();
		other[0] ^= 1;
		expect(decodeDropMap(other)).toBeNull();
	});
});

describe('nodesCsv', () => {
	it('lists every node by net, layer, y, x in full precision', () => {
		const plan = rail();
		const { network, point } = solved(plan);
		const lines = nodesCsv(plan, network, point).split('\n');
		expect(lines[0]).toBe('net,layer,xUm,yUm,volts');
		expect(lines.at(-1)).toBe('');
		const rows = lines.slice(1, -1).map((line) => line.split(','));
		expect(rows.length).toBe(network.nodes.count);
		expect(rows[0].slice(0, 4)).toEqual(['vdd', 'm1', '0', '0']);
		expect(rows[1].slice(0, 4)).toEqual(['vdd', 'm1', '10', '0']);
		const volts = new Set(rows.map((row) => Number(row[4])));
		point.voltage.forEach((value) => expect(volts.has(value)).toBe(true));
		const keys = rows.map(([, layer, x, y]) => [layer === 'm1' ? 0 : 1, Number(y), Number(x)]);
		const sorted = [...keys].sort((a, b) => a[0] - b[0] || a[1] - b[1] || a[2] - b[2]);
		expect(keys).toEqual(sorted);
	});
});
