/**
 * The exported deck in a general circuit simulator (ngspice, from Debian's packages) against values
 * worked out by hand. Each case is named after its entry in the list of check values.
 */
import { describe, expect, test } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { nodeNames, writeDeck } from '#lib/netlist/index.ts';
import { runDeck } from '../support/ngspice.ts';
import {
	cellOf,
	feedAt,
	ladderPlan,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../support/plans.ts';
import { meshOf } from '../support/solving.ts';

/** Runs the deck of a plan in its first mode and corner; readers for what the cases ask. */
async function simulated(plan: Floorplan) {
	const network = meshOf(plan);
	const written = writeDeck(plan, network, { mode: plan.modes[0], corner: plan.corners[0] });
	if (written.status === 'refused') throw new Error(JSON.stringify(written.problems));
	const { volts, amps } = await runDeck(written.deck);
	const { names } = nodeNames(plan, network);
	const read = (name: string) => {
		const value = volts.get(name);
		if (value === undefined) throw new Error(`the simulator has no node ${name}`);
		return value;
	};
	return {
		network,
		voltage: (node: number) => read(names[node]),
		outputOf: (r: number) => read(names[network.regulators.outputNode[r]]),
		correction: (net: string) => read(`u_${net}`),
		amps: plan.regulators.map(({ id }) => amps.get(`vr_${id}`) ?? NaN)
	};
}

function expectAll(actual: readonly number[], expected: readonly number[], tolerance: number) {
	expect(actual).toHaveLength(expected.length);
	actual.forEach((value, k) => {
		expect(Math.abs(value - expected[k]), `unit ${k + 1}: ${value}`).toBeLessThan(tolerance);
	});
}

type UnitValues = Partial<Parameters<typeof regulatorAt>[4]>;
type CellValues = Partial<Parameters<typeof cellOf>[1]>;

/** Units of 50 mohm and one load on one node: the middle of a strap, net volts 1. */
function oneNodePlan(
	setsV: readonly number[],
	loadA: number,
	{
		cell = {},
		unit = () => ({}),
		...parts
	}: {
		cell?: CellValues;
		unit?: (k: number) => UnitValues;
		senseRangeV?: number;
		exponent?: number;
	} = {}
): Floorplan {
	const plan = ladderPlan(
		{},
		{
			cells: [cellOf('unit', cell)],
			regulators: setsV.map((setV, k) =>
				regulatorAt(`r${k + 1}`, 'vdd', 50, 0, {
					offsetV: Math.round((setV - 1) * 1e6) / 1e6,
					...unit(k)
				})
			),
			// Half a micrometre about the node at 50 um, well inside its own cell of 2.5 um.
			blocks: [
				loadAt('load', 'vdd', 50, 0, loadA, {
					outline: rectangle(49.5, -1, 50.5, 1),
					voltageExponent: parts.exponent ?? 0
				})
			],
			nets: [
				{
					id: 'vdd',
					kind: 'regulated',
					volts: 1,
					...(parts.senseRangeV === undefined
						? {}
						: {
								senseLoop: { points: [{ xUm: 50, yUm: 0 }], rangeV: parts.senseRangeV }
							})
				}
			]
		}
	);
	return plan;
}

const A = [1.002, 0.999, 1, 0.997];

describe('deck of small plans in a circuit simulator', () => {
	test('CV-22: two regulators at the ends of a strap (Kirchhoff)', async () => {
		const plan = ladderPlan(
			{ totalOhm: 0.02 },
			{
				regulators: [
					regulatorAt('r1', 'vdd', 0, 0, { offsetV: 0.003 }),
					regulatorAt('r2', 'vdd', 100, 0)
				],
				blocks: [loadAt('load', 'vdd', 25, 0, 0.3, { outline: rectangle(24.5, -1, 25.5, 1) })]
			}
		);
		const { network, voltage, amps } = await simulated(plan);
		expectAll(amps, [0.1875, 0.1125], 1e-9);
		expect(network.loads.count).toBe(1);
		expect(voltage(network.loads.node[0])).toBeCloseTo(0.9926875, 9);
	});

	test('CV-40: units of different set points on one node (Millman 1940)', async () => {
		const { outputOf, amps } = await simulated(oneNodePlan(A, 0.4));
		expectAll(amps, [0.15, 0.09, 0.11, 0.05], 1e-8);
		expect(outputOf(0)).toBeCloseTo(0.9945, 9);
	});

	test('CV-43: one unit at its rated current', async () => {
		const { outputOf, amps } = await simulated(oneNodePlan(A, 0.4, { cell: { maxA: 0.13 } }));
		expectAll(amps, [0.13, 0.29 / 3, 0.35 / 3, 0.17 / 3], 1e-8);
		expect(outputOf(0)).toBeCloseTo(0.99416667, 8);
	});

	test('CV-44: units that may not sink stand idle, units that may do', async () => {
		const idle = await simulated(oneNodePlan([1.01, 1, 1, 1], 0.1));
		expectAll(idle.amps, [0.1, 0, 0, 0], 1e-8);
		expect(idle.outputOf(0)).toBeCloseTo(1.005, 8);
		const sinking = await simulated(oneNodePlan([1.01, 1, 1, 1], 0.1, { cell: { sinkA: 1 } }));
		expectAll(sinking.amps, [0.175, -0.025, -0.025, -0.025], 1e-8);
		expect(sinking.outputOf(0)).toBeCloseTo(1.00125, 8);
	});

	test('CV-45: a unit fully on', async () => {
		const ladder = oneNodePlan([1, 1], 0.2, { unit: (k) => ({ input: `vin${k + 1}` }) });
		const plan = planOf({
			...ladder,
			layers: [...ladder.layers, { id: 'm2', direction: 'vertical', sheetOhm: 1 }],
			nets: [
				...ladder.nets,
				{ id: 'vin1', kind: 'input', volts: 1.02 },
				{ id: 'vin2', kind: 'input', volts: 1.2 }
			],
			straps: [
				...ladder.straps,
				{ id: 'i1', net: 'vin1', layer: 'm2', pitchUm: 200, widthUm: 1, offsetUm: 49 },
				{ id: 'i2', net: 'vin2', layer: 'm2', pitchUm: 200, widthUm: 1, offsetUm: 51 }
			],
			feeds: [feedAt('f1', 'vin1', 49, 0, 0), feedAt('f2', 'vin2', 51, 0, 0)]
		});
		const { outputOf, amps } = await simulated(plan);
		expectAll(amps, [0.2 / 3, 0.4 / 3], 1e-8);
		expect(outputOf(0)).toBeCloseTo(0.99333333, 8);
	});

	test('CV-46: a unit out of service', async () => {
		const plan = oneNodePlan(A, 0.4, { unit: (k) => ({ enabled: k > 0 }) });
		const { outputOf, amps } = await simulated(plan);
		expectAll(amps.slice(1), [0.14, 0.16, 0.1], 1e-8);
		expect(amps[0]).toBeNaN();
		expect(outputOf(0)).toBeCloseTo(0.992, 9);
	});

	test('CV-48 and CV-49: the shared slow loop, inside its range and at its end', async () => {
		const inside = await simulated(oneNodePlan(A, 0.4, { senseRangeV: 0.02 }));
		expect(inside.correction('vdd')).toBeCloseTo(0.0055, 8);
		expect(inside.outputOf(0)).toBeCloseTo(1, 8);
		expectAll(inside.amps, [0.15, 0.09, 0.11, 0.05], 1e-8);
		const atEnd = await simulated(oneNodePlan(A, 0.4, { senseRangeV: 0.004 }));
		expect(atEnd.correction('vdd')).toBeCloseTo(0.004, 8);
		expect(atEnd.outputOf(0)).toBeCloseTo(0.9985, 8);
	});

	test('CV-54: a constant-power load behind a resistance (quadratic)', async () => {
		const plan = oneNodePlan([1], 0.5, { cell: { outputOhm: 0.1, maxA: 10 }, exponent: -1 });
		const { outputOf, amps } = await simulated(plan);
		expect(outputOf(0)).toBeCloseTo((1 + Math.sqrt(0.8)) / 2, 9);
		expect(amps[0]).toBeCloseTo(0.527864, 7);
	});

	test('loads of exponent 1 and 2 against their own equations', async () => {
		const linear = await simulated(oneNodePlan([1], 0.5, { exponent: 1 }));
		// v = 1 - 0.05 * 0.5 v.
		expect(linear.outputOf(0)).toBeCloseTo(1 / 1.025, 9);
		const square = await simulated(oneNodePlan([1], 0.5, { exponent: 2 }));
		// v = 1 - 0.025 v^2.
		expect(square.outputOf(0)).toBeCloseTo((-1 + Math.sqrt(1.1)) / 0.05, 9);
	});

	test('a collapsed constant-current load goes on linearly to zero', async () => {
		// 2 A wanted behind 0.95 ohm and a unit that could give them: v = 1 - 0.95 * 20 v, v = 0.05.
		const plan = oneNodePlan([1], 2, { cell: { outputOhm: 0.95, maxA: 10 } });
		const { outputOf, amps } = await simulated(plan);
		expect(outputOf(0)).toBeCloseTo(0.05, 8);
		expect(amps[0]).toBeCloseTo(1, 8);
	});

	test('quiescent current flows from the input net to the ground net, which rises', async () => {
		const ladder = oneNodePlan([1], 0.2, {
			cell: { quiescentA: 0.01 },
			unit: () => ({ input: 'vin' })
		});
		const plan = planOf({
			...ladder,
			layers: [...ladder.layers, { id: 'm2', direction: 'vertical', sheetOhm: 1 }],
			nets: [
				...ladder.nets,
				{ id: 'vin', kind: 'input', volts: 1.2 },
				{ id: 'gnd', kind: 'ground', volts: 0 }
			],
			straps: [
				...ladder.straps,
				{ id: 'i', net: 'vin', layer: 'm2', pitchUm: 200, widthUm: 1, offsetUm: 49 },
				{ id: 'g', net: 'gnd', layer: 'm2', pitchUm: 200, widthUm: 1, offsetUm: 51 }
			],
			feeds: [feedAt('fi', 'vin', 49, 0, 0.3), feedAt('fg', 'gnd', 51, 0, 0.1)],
			modes: [{ id: 'default', inputVolts: { vin: 1.3 } }]
		});
		const { network, outputOf, voltage, amps } = await simulated(plan);
		expect(amps[0]).toBeCloseTo(0.2, 9);
		const ground = voltage(network.regulators.groundNode[0]);
		// 0.2 A of load and 0.01 A of the unit itself through 0.1 ohm; the input gives the same.
		expect(ground).toBeCloseTo(0.021, 8);
		expect(voltage(network.regulators.inputNode[0])).toBeCloseTo(1.3 - 0.3 * 0.21, 8);
		// The set point refers to the local ground.
		expect(outputOf(0)).toBeCloseTo(1 - 0.05 * 0.2 + 0.021, 8);
		const quiet = await simulated({
			...plan,
			nets: plan.nets.map((net) => ({ ...net, groundReference: 'quiet' as const }))
		});
		expect(quiet.outputOf(0)).toBeCloseTo(1 - 0.05 * 0.2, 8);
	});

	test('a corner scales output resistance, load, metal and temperature', async () => {
		const base = oneNodePlan([1], 0.2);
		const plan = planOf({
			...base,
			corners: [{ id: 'c', temperatureC: 125, metalScale: 1.2, loadScale: 1.5, outputOhmScale: 2 }],
			layers: [{ ...base.layers[0], tempCoPerC: 0.004 }],
			regulators: [{ ...base.regulators[0], xUm: -1 }]
		});
		const { network, voltage, amps } = await simulated(plan);
		expect(amps[0]).toBeCloseTo(0.3, 9);
		// Half of 1 ohm, times 1.4 and 1.2, and twice 50 mohm.
		expect(voltage(network.loads.node[0])).toBeCloseTo(1 - 0.3 * (0.5 * 1.4 * 1.2 + 0.1), 8);
	});
});
