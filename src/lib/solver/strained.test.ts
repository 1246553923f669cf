/**
 * Shrunk plans of the property test in `tests/reference/operating-points.test.ts` on which the
 * iteration once ended without an answer. Loads of constant or rising current leave one operating
 * point, so every one of them has to be solved.
 */
import { expect, it } from 'vitest';
import {
	cellOf,
	feedAt,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { solved } from '../../../tests/support/solving.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';

interface Strained {
	readonly sheetOhm: number;
	readonly inputV: number;
	readonly feedOhm: number;
	readonly cell: Parameters<typeof cellOf>[1];
	/** Range of the sense loop, V. */
	readonly rangeV?: number;
	/** Place of each unit, um, whether its input is ideal, and its offset, V. */
	readonly units: readonly (readonly [number, number, 'vin' | null, number])[];
	/** Place of each load, um; all draw the same. */
	readonly loads: readonly (readonly [number, number])[];
	readonly loadA: number;
	readonly exponent?: number;
}

/** A rail, its input and its ground on 8 x 8 straps each. */
function strainedPlan(parts: Strained): Floorplan {
	const points = [
		{ xUm: 20, yUm: 20 },
		{ xUm: 50, yUm: 40, weight: 2 }
	];
	return planOf({
		die: { outline: rectangle(0, 0, 70, 70) },
		layers: [
			{ id: 'm1', direction: 'horizontal', sheetOhm: parts.sheetOhm },
			{ id: 'm2', direction: 'vertical', sheetOhm: parts.sheetOhm }
		],
		vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: 0.01, cutsPerUm2: 0 }],
		nets: [
			{
				id: 'vdd',
				kind: 'regulated',
				volts: 1,
				...(parts.rangeV === undefined ? {} : { senseLoop: { points, rangeV: parts.rangeV } })
			},
			{ id: 'vin', kind: 'input', volts: parts.inputV },
			{ id: 'gnd', kind: 'ground', volts: 0 }
		],
		straps: ['vdd', 'vin', 'gnd'].flatMap((net, k) =>
			['m1', 'm2'].map((layer) => ({
				id: `${net}.${layer}`,
				net,
				layer,
				pitchUm: 10,
				widthUm: 1,
				offsetUm: 3 * k
			}))
		),
		feeds: [
			feedAt('f1', 'vin', 3, 3, parts.feedOhm),
			feedAt('f2', 'vin', 63, 63, parts.feedOhm),
			feedAt('g1', 'gnd', 6, 6, 0),
			feedAt('g2', 'gnd', 66, 66, 0.01)
		],
		cells: [cellOf('unit', { quiescentA: 0.0005, ...parts.cell })],
		regulators: parts.units.map(([xUm, yUm, input, offsetV], k) =>
			regulatorAt(`r${k}`, 'vdd', xUm, yUm, { input, offsetV })
		),
		blocks: parts.loads.map(([xUm, yUm], k) =>
			loadAt(`b${k}`, 'vdd', xUm, yUm, parts.loadA, { voltageExponent: parts.exponent ?? 0 })
		)
	});
}

/** Solves a plan and expects it to prove itself. */
function proven(plan: Floorplan) {
	const answer = solved(plan);
	expect(answer.point.proof.statesConsistent).toBe(true);
	expect(answer.point.proof.kclRelative).toBeLessThan(1e-10);
	expect(answer.point.proof.powerRelative).toBeLessThan(1e-10);
	return answer;
}

it('nearly all units flat, and loads collapsed behind a weak rail', () => {
	const answer = proven(
		strainedPlan({
			sheetOhm: 0.1,
			inputV: 1.2,
			feedOhm: 0,
			cell: { outputOhm: 0.001, onOhm: 0.01, maxA: 0.2 },
			units: [
				[0, 0, 'vin', 0],
				[30, 0, null, 0],
				[0, 20, 'vin', 0],
				[40, 0, null, 0],
				[40, 10, null, 0],
				[0, 30, null, 0],
				[0, 20, 'vin', 0],
				[20, 50, null, 0],
				[0, 20, 'vin', 0],
				[40, 30, null, 0],
				[70, 60, null, 0],
				[40, 70, null, 0]
			],
			loads: [
				[40, 0],
				[20, 10],
				[50, 0],
				[50, 50],
				[40, 60]
			],
			loadA: 0.42150239999999994
		})
	);
	expect(new Set(answer.point.regulatorStates)).toEqual(new Set(['idle', 'limited', 'dropout']));
	expect(answer.point.collapsedBlocks).toEqual([0, 2, 3, 4]);
});

it('all units at a bound, with little missing: the level drifts until one leaves its bound', () => {
	const answer = proven(
		strainedPlan({
			sheetOhm: 0.01,
			inputV: 1.05,
			feedOhm: 0,
			cell: { outputOhm: 0.001, onOhm: 0.3, maxA: 0.05, sinkA: 0.02 },
			units: [
				[60, 60, 'vin', 0.010000000000000009],
				[60, 40, null, -0.04300000000000001],
				[0, 30, null, -0.05600000000000001],
				[60, 30, null, 0.0904],
				[30, 50, 'vin', -0.044399999999999995],
				[70, 50, null, 0.017199999999999993],
				[50, 60, null, -0.0118],
				[10, 70, 'vin', -0.08080000000000001]
			],
			loads: [
				[60, 10],
				[20, 20],
				[60, 60]
			],
			loadA: 0.110088
		})
	);
	expect(answer.point.regulatorStates.slice(0, 7)).toEqual(Array(7).fill('limited'));
	// Seven units give 0.05 A each, the eighth what is left of 0.330264 A: it sinks.
	expect(answer.ampsOf('r7')).toBeCloseTo(3 * 0.110088 - 7 * 0.05, 9);
});

it('a loop whose only unit drops out at the moment when the mean is at nominal goes up', () => {
	const answer = proven(
		strainedPlan({
			sheetOhm: 0.01,
			inputV: 1.05,
			feedOhm: 0.2,
			cell: { outputOhm: 0.5, onOhm: 0.01, maxA: 0.2, sinkA: 0.02 },
			rangeV: 0.2,
			units: [[20, 60, 'vin', 0]],
			loads: [
				[50, 40],
				[20, 60],
				[0, 10]
			],
			loadA: 0.060456,
			exponent: 0.5
		})
	);
	expect(answer.stateOf('r0')).toBe('dropout');
	expect(answer.point.sense[0].state).toBe('at-range');
	expect(answer.point.sense[0].correctionV).toBeCloseTo(0.2, 12);
	expect(answer.point.sense[0].errorV).toBeGreaterThan(0);
});

it('currents that balance are no answer while the loop is beyond its range', () => {
	const answer = proven(
		strainedPlan({
			sheetOhm: 0.001,
			inputV: 1.2,
			feedOhm: 0.01,
			cell: { outputOhm: 0.5, onOhm: 0.01, maxA: 5, sinkA: 0.02 },
			rangeV: 0.02,
			units: [[20, 0, 'vin', -0.0092]],
			loads: [[60, 0]],
			loadA: 2.7126
		})
	);
	expect(answer.point.sense[0].state).toBe('at-range');
	expect(answer.point.sense[0].correctionV).toBeCloseTo(0.02, 12);
	expect(answer.point.collapsedBlocks).toEqual([0]);
});
