/**
 * Numbers from outside for regulators, run through the real mesh and solver. Each test names the
 * check value and its source; the numbers stand as published or as the closed form gives them.
 */
import { describe, expect, it } from 'vitest';
import type { FloorplanInput } from '#lib/floorplan/index.ts';
import {
	cellOf,
	feedAt,
	ladderPlan,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../support/plans.ts';
import { meshOf, outcomeOf, solved } from '../support/solving.ts';

type Regulators = NonNullable<FloorplanInput['regulators']>;
type Cell = NonNullable<FloorplanInput['cells']>[number];

/** Units on one node of a short strap, and a load on the same node. */
function oneNode(
	offsetsV: readonly number[],
	amps: number,
	cell: Partial<Cell> = {},
	parts: { disabled?: readonly string[]; rangeV?: number } = {}
) {
	return ladderPlan(
		{ lengthUm: 100, totalOhm: 1 },
		{
			nets: [
				{
					id: 'vdd',
					kind: 'regulated',
					volts: 1,
					...(parts.rangeV === undefined
						? {}
						: { senseLoop: { points: [{ xUm: 50, yUm: 0 }], rangeV: parts.rangeV } })
				}
			],
			cells: [cellOf('unit', cell)],
			regulators: offsetsV.map((offsetV, k) =>
				regulatorAt(`r${k + 1}`, 'vdd', 50, 0, {
					offsetV,
					enabled: !(parts.disabled ?? []).includes(`r${k + 1}`)
				})
			),
			blocks: [loadAt('load', 'vdd', 50, 0, amps)]
		}
	);
}

/** Case A of the table: sets 1.002, 0.999, 1.000, 0.997 V, 50 mohm each, 0.4 A. */
const CASE_A = [0.002, -0.001, 0, -0.003];

describe('CV-22: two regulators at the ends of a strap (Kirchhoff; also by a circuit simulator)', () => {
	it('shares 0.3 A as 0.1875 A and 0.1125 A', () => {
		const answer = solved(
			ladderPlan(
				{ lengthUm: 100, totalOhm: 0.02 },
				{
					regulators: [
						regulatorAt('r1', 'vdd', 0, 0, { offsetV: 0.003 }),
						regulatorAt('r2', 'vdd', 100, 0)
					],
					blocks: [loadAt('load', 'vdd', 25, 0, 0.3)]
				}
			)
		);
		expect(answer.ampsOf('r1')).toBeCloseTo(0.1875, 10);
		expect(answer.ampsOf('r2')).toBeCloseTo(0.1125, 10);
		expect(answer.voltageAt('vdd', 25, 0)).toBeCloseTo(0.9926875, 10);
	});
});

describe('one node', () => {
	it('CV-40: four units share by their offsets (Millman 1940; TI SBVA093)', () => {
		const answer = solved(oneNode(CASE_A, 0.4));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.9945, 11);
		[0.15, 0.09, 0.11, 0.05].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k + 1}`)).toBeCloseTo(amps, 10)
		);
	});

	it('CV-41: equal sets share as 1 / outputOhm (droop sharing, Irving and Jovanovic 2000)', () => {
		const ohms = [0.04, 0.05, 0.08, 0.1];
		const plan = ladderPlan(
			{ lengthUm: 100, totalOhm: 1 },
			{
				cells: ohms.map((outputOhm, k) => cellOf(`c${k}`, { outputOhm })),
				regulators: ohms.map((_, k) => regulatorAt(`r${k}`, 'vdd', 50, 0, { cell: `c${k}` })),
				blocks: [loadAt('load', 'vdd', 50, 0, 0.27)]
			}
		);
		const answer = solved(plan);
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.996, 11);
		[0.1, 0.08, 0.05, 0.04].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k}`)).toBeCloseTo(amps, 10)
		);
	});

	it('CV-42: 200 uV over 2 mohm is 100 mA of imbalance (TI TPS7A57 data sheet)', () => {
		// The data sheet's 2 mohm lie between two units: 1 mohm in each.
		const answer = solved(oneNode([0.0002, 0], 1, { outputOhm: 0.001 }));
		const apart = answer.ampsOf('r1') - answer.ampsOf('r2');
		expect(apart / 2).toBeCloseTo(0.1, 9);
	});

	it('CV-43: a unit at its limit leaves the rest to the others (active set by hand)', () => {
		const answer = solved(oneNode(CASE_A, 0.4, { maxA: 0.13 }));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.99416667, 7);
		[0.13, 0.09666667, 0.11666667, 0.05666667].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k + 1}`)).toBeCloseTo(amps, 7)
		);
		expect(answer.stateOf('r1')).toBe('limited');
		expect(answer.stateOf('r2')).toBe('regulating');
	});

	it('CV-44: units that may not sink stand idle (active set by hand)', () => {
		const answer = solved(oneNode([0.01, 0, 0, 0], 0.1));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(1.005, 11);
		expect(answer.ampsOf('r1')).toBeCloseTo(0.1, 11);
		for (const id of ['r2', 'r3', 'r4']) {
			expect(answer.ampsOf(id)).toBe(0);
			expect(answer.stateOf(id)).toBe('idle');
		}
	});

	it('CV-44: units that may sink take the surplus', () => {
		const answer = solved(oneNode([0.01, 0, 0, 0], 0.1, { sinkA: 0.1 }));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(1.00125, 11);
		[0.175, -0.025, -0.025, -0.025].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k + 1}`)).toBeCloseTo(amps, 10)
		);
	});

	it('CV-46: with unit 1 out of service the others take its share (Millman)', () => {
		const answer = solved(oneNode(CASE_A, 0.4, {}, { disabled: ['r1'] }));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.992, 11);
		[0, 0.14, 0.16, 0.1].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k + 1}`)).toBeCloseTo(amps, 10)
		);
		expect(answer.stateOf('r1')).toBe('off');
	});

	it('CV-47: 0.6 A from four units of 0.13 A has no operating point (by inspection)', () => {
		const plan = oneNode(CASE_A, 0.6, { maxA: 0.13 });
		const outcome = outcomeOf(plan, meshOf(plan));
		expect(outcome.status).toBe('unsolvable');
		if (outcome.status !== 'unsolvable') return;
		expect(outcome.problems[0].path).toBe('nets (vdd)');
		expect(outcome.problems[0].wantedA).toBeCloseTo(0.6, 12);
		expect(outcome.problems[0].availableA).toBeCloseTo(0.52, 12);
	});

	it('CV-48: the shared slow loop brings the mean to nominal (integral action)', () => {
		const answer = solved(oneNode(CASE_A, 0.4, {}, { rangeV: 0.02 }));
		expect(answer.point.sense[0].correctionV).toBeCloseTo(0.0055, 11);
		expect(answer.point.sense[0].state).toBe('holding');
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(1, 11);
		[0.15, 0.09, 0.11, 0.05].forEach((amps, k) =>
			expect(answer.ampsOf(`r${k + 1}`)).toBeCloseTo(amps, 9)
		);
	});

	it('CV-49: the loop stops at the end of its range (saturation)', () => {
		const answer = solved(oneNode(CASE_A, 0.4, {}, { rangeV: 0.004 }));
		expect(answer.point.sense[0].correctionV).toBeCloseTo(0.004, 12);
		expect(answer.point.sense[0].state).toBe('at-range');
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.9985, 11);
		expect(answer.ampsOf('r1')).toBeCloseTo(0.15, 9);
		expect(answer.result.warnings.map(({ code }) => code)).toContain('sense-at-range');
	});

	it('CV-50: proportional control alone leaves I Ro (feedback textbooks)', () => {
		// Ro,open = 10 ohm and A = 1000: Ro = 10 / 1001 ohm; the error at 1 A is 9.990 mV.
		const answer = solved(oneNode([0], 1, { outputOhm: 10 / 1001, maxA: 2 }));
		expect(1 - answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.00999001, 8);
	});
});

/** A rail fed from input straps of the given volts, one above the other. */
function fedRail(
	inputVolts: readonly number[],
	regulators: Regulators,
	cell: Partial<Cell>,
	amps: number
) {
	return planOf({
		die: { outline: rectangle(0, -5, 100, 95) },
		layers: [
			{ id: 'm1', direction: 'horizontal', sheetOhm: 0.01 },
			{ id: 'm2', direction: 'horizontal', sheetOhm: 0.01 }
		],
		nets: [
			...inputVolts.map((volts, k) => ({ id: `vin${k + 1}`, kind: 'input' as const, volts })),
			{ id: 'vdd', kind: 'regulated', volts: 1 }
		],
		straps: [
			...inputVolts.map((_, k) => ({
				id: `in${k + 1}`,
				net: `vin${k + 1}`,
				layer: 'm2',
				pitchUm: 200,
				widthUm: 1,
				offsetUm: 10 * k
			})),
			{ id: 'rail', net: 'vdd', layer: 'm1', pitchUm: 200, widthUm: 1, offsetUm: 0 }
		],
		// The feed stands at the pin's foot point: no strap lies between source and regulator.
		feeds: inputVolts.map((_, k) => feedAt(`f${k + 1}`, `vin${k + 1}`, 50, 10 * k, 0)),
		cells: [cellOf('unit', cell)],
		regulators,
		blocks: [loadAt('load', 'vdd', 50, 0, amps)]
	});
}

describe('regulators with an input net', () => {
	it('CV-45: a unit without headroom is fully on (drop-out = Ron I, Rincon-Mora)', () => {
		const answer = solved(
			fedRail(
				[1.02, 1.2],
				[
					regulatorAt('r1', 'vdd', 50, 0, { input: 'vin1' }),
					regulatorAt('r2', 'vdd', 50, 0, { input: 'vin2' })
				],
				{ onOhm: 0.4, outputOhm: 0.05 },
				0.2
			)
		);
		expect(answer.ampsOf('r1')).toBeCloseTo(0.06666667, 8);
		expect(answer.ampsOf('r2')).toBeCloseTo(0.13333333, 8);
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.99333333, 8);
		expect(answer.stateOf('r1')).toBe('dropout');
		expect(answer.stateOf('r2')).toBe('regulating');
	});

	it('CV-51: efficiency of a series regulator (textbook): 74.257 % of at most 75 %', () => {
		const plan = fedRail(
			[1.2],
			[regulatorAt('r1', 'vdd', 50, 0, { input: 'vin1', offsetV: -0.08 })],
			{ outputOhm: 0.05, onOhm: 0.1, quiescentA: 0.004 },
			0.4
		);
		const answer = solved(plan);
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.9, 11);
		const { efficiency } = answer.result.power;
		expect(efficiency).toBeCloseTo((0.9 * 0.4) / (1.2 * 0.404), 11);
		expect(efficiency).toBeCloseTo(0.74257, 5);
	});
});

describe('chains and rings of regulators (difference equation; 1 / L + L = 2 + r / Ro)', () => {
	const cell = cellOf('unit', { outputOhm: 2 });

	it('CV-52: shares along a chain fall as 0.6096118 per node', () => {
		const spans = 400;
		const answer = solved(
			ladderPlan(
				{ lengthUm: 10 * spans, totalOhm: 0.5 * spans },
				{
					cells: [cell],
					regulators: Array.from({ length: spans + 1 }, (_, k) =>
						regulatorAt(`r${k}`, 'vdd', 10 * k, 0)
					),
					blocks: [loadAt('load', 'vdd', (10 * spans) / 2, 0, 1)]
				}
			)
		);
		[0.2425356, 0.1478526, 0.0901327, 0.0549459].forEach((share, k) => {
			expect(answer.ampsOf(`r${spans / 2 + k}`)).toBeCloseTo(share, 7);
			expect(answer.ampsOf(`r${spans / 2 - k}`)).toBeCloseTo(share, 7);
		});
	});

	it('CV-53: shares around a ring of eight', () => {
		// Two straps of four nodes, joined at both ends; the links with their two vias are 0.5 ohm too.
		const viaOhm = 1e-3;
		const plan = planOf({
			die: { outline: rectangle(0, 0, 30, 10) },
			layers: [
				{ id: 'm1', direction: 'horizontal', sheetOhm: 0.05 },
				{ id: 'm2', direction: 'vertical', sheetOhm: (0.5 - 2 * viaOhm) / 10 }
			],
			vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: viaOhm, cutsPerUm2: 0 }],
			nets: [{ id: 'vdd', kind: 'regulated', volts: 1 }],
			straps: [
				{ id: 'h', net: 'vdd', layer: 'm1', pitchUm: 10, widthUm: 1, offsetUm: 0 },
				{ id: 'v', net: 'vdd', layer: 'm2', pitchUm: 30, widthUm: 1, offsetUm: 0 }
			],
			cells: [cell],
			regulators: [
				...[0, 10, 20, 30].map((x, k) => regulatorAt(`r${k}`, 'vdd', x, 0)),
				...[30, 20, 10, 0].map((x, k) => regulatorAt(`r${k + 4}`, 'vdd', x, 10))
			],
			blocks: [loadAt('load', 'vdd', 0, 0, 1)]
		});
		const answer = solved(plan);
		const shares = [0.2519675, 0.1584634, 0.1045752, 0.0768307, 0.068294];
		shares.forEach((share, j) => expect(answer.ampsOf(`r${j}`)).toBeCloseTo(share, 7));
		[1, 2, 3].forEach((j) => expect(answer.ampsOf(`r${8 - j}`)).toBeCloseTo(shares[j], 7));
		const sum = answer.point.regulatorAmps.reduce((total, amps) => total + amps, 0);
		expect(sum).toBeCloseTo(1, 11);
	});
});

describe('CV-54: constant power behind a resistance (quadratic)', () => {
	function constantPower(watts: number) {
		return ladderPlan(
			{ kind: 'input' },
			{
				feeds: [feedAt('f', 'vdd', 50, 0, 0.1)],
				blocks: [loadAt('load', 'vdd', 50, 0, watts, { voltageExponent: -1 })]
			}
		);
	}

	it('0.5 W at 1 V behind 0.1 ohm: 0.9472136 V and 0.5278640 A', () => {
		const answer = solved(constantPower(0.5));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(0.9472135955, 9);
		expect(answer.result.blocks[0].amps).toBeCloseTo(0.527864045, 9);
	});

	it('just below the limit of 2.5 W it still finds the upper solution', () => {
		const watts = 2.4999;
		const answer = solved(constantPower(watts));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo((1 + Math.sqrt(1 - 0.4 * watts)) / 2, 8);
		expect(answer.result.findings).toEqual([]);
	});

	it('above the limit the block has collapsed, and the result says so', () => {
		// Below a tenth of nominal the law is a conductance: 3 A * 10 / 0.1 V = 300 S behind 0.1 ohm.
		const answer = solved(constantPower(3));
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(1 / (1 + 300 * 0.1), 9);
		expect(answer.result.findings.map(({ kind, subject }) => [kind, subject])).toContainEqual([
			'collapsed',
			'load'
		]);
		expect(answer.result.blocks[0].collapsed).toBe(true);
	});
});
