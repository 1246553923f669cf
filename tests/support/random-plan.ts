/** Random plans with an input, a rail and a ground, from healthy to far overloaded. */
import fc from 'fast-check';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { cellOf, feedAt, loadAt, planOf, rectangle, regulatorAt } from './plans.ts';

const SIDE = 8;
const PITCH_UM = 10;
const SPAN_UM = (SIDE - 1) * PITCH_UM;

const crossing = fc.integer({ min: 0, max: SIDE - 1 }).map((k) => k * PITCH_UM);
const fraction = fc.integer({ min: 0, max: 1000 }).map((value) => value / 1000);

/**
 * Plans of three nets of 8 x 8 straps and up to 20 units, in which offsets, output resistances,
 * ratings, input volts and series resistances span what a rail may meet and more, loads reach the
 * rating of all units, and half of the rails have a sense loop.
 * @param exponents of the loads' laws; 0 and more leave one operating point or none
 */
export function randomPlans(exponents: readonly number[]): fc.Arbitrary<Floorplan> {
	return fc
		.record({
			maxOffsetV: fc.constantFrom(0, 0.001, 0.01, 0.1),
			outputOhm: fc.constantFrom(1e-3, 0.05, 0.5),
			onOhm: fc.constantFrom(0.01, 0.3, 1),
			maxA: fc.constantFrom(0.05, 0.2, 1, 5),
			sinkA: fc.constantFrom(0, 0.02),
			bondOhm: fc.constantFrom(0.01, 0.1, 1),
			inputV: fc.constantFrom(1.2, 1.05, 1.01, 0.95),
			feedOhm: fc.constantFrom(0, 0.01, 0.2),
			rangeV: fc.constantFrom(null, 0.001, 0.02, 0.2),
			groundReference: fc.constantFrom('local' as const, 'quiet' as const),
			exponent: fc.constantFrom(...exponents),
			loading: fraction,
			units: fc.array(
				fc.record({ x: crossing, y: crossing, offset: fraction, ideal: fc.boolean() }),
				{ minLength: 1, maxLength: 20 }
			),
			loads: fc.array(fc.record({ x: crossing, y: crossing }), { minLength: 1, maxLength: 6 })
		})
		.map((parts) => {
			const straps = ['vdd', 'vin', 'gnd'].flatMap((net, k) =>
				(['m1', 'm2'] as const).map((layer) => ({
					id: `${net}.${layer}`,
					net,
					layer,
					pitchUm: PITCH_UM,
					widthUm: 1,
					offsetUm: 3 * k
				}))
			);
			const total = 0.99 * parts.loading * parts.units.length * parts.maxA;
			const sheetOhm = parts.bondOhm / PITCH_UM;
			return planOf({
				die: { outline: rectangle(0, 0, SPAN_UM, SPAN_UM) },
				layers: [
					{ id: 'm1', direction: 'horizontal', sheetOhm },
					{ id: 'm2', direction: 'vertical', sheetOhm }
				],
				vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: 0.01, cutsPerUm2: 0 }],
				nets: [
					{
						id: 'vdd',
						kind: 'regulated',
						volts: 1,
						groundReference: parts.groundReference,
						...(parts.rangeV === null
							? {}
							: {
									senseLoop: {
										points: [
											{ xUm: 20, yUm: 20 },
											{ xUm: 50, yUm: 40, weight: 2 }
										],
										rangeV: parts.rangeV
									}
								})
					},
					{ id: 'vin', kind: 'input', volts: parts.inputV },
					{ id: 'gnd', kind: 'ground', volts: 0 }
				],
				straps,
				feeds: [
					feedAt('f1', 'vin', 3, 3, parts.feedOhm),
					feedAt('f2', 'vin', 63, 63, parts.feedOhm),
					feedAt('g1', 'gnd', 6, 6, 0),
					feedAt('g2', 'gnd', 66, 66, 0.01)
				],
				cells: [
					cellOf('unit', {
						outputOhm: parts.outputOhm,
						onOhm: parts.onOhm,
						maxA: parts.maxA,
						sinkA: parts.sinkA,
						quiescentA: 0.0005
					})
				],
				regulators: parts.units.map((unit, k) =>
					regulatorAt(`r${k}`, 'vdd', unit.x, unit.y, {
						input: unit.ideal ? null : 'vin',
						offsetV: (2 * unit.offset - 1) * parts.maxOffsetV
					})
				),
				blocks: parts.loads.map((load, k) =>
					loadAt(`b${k}`, 'vdd', load.x, load.y, total / parts.loads.length, {
						voltageExponent: parts.exponent
					})
				)
			});
		});
}
