/** What must hold for any network (check values 1), on random rails through the real mesh and solver. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { buildDropMap } from '#lib/results/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { feedAt, ladderPlan, loadAt } from '../support/plans.ts';
import { RAIL_PITCH_UM, railParts, railPlan, type RailParts } from '../support/random-rail.ts';
import { meshOf, outcomeOf, readingOf, solved } from '../support/solving.ts';

const RUNS = { numRuns: 40 };
/** A unit may sink so much that no random rail reaches the bound: the rail is linear. */
const LINEAR_A = 100;

function drops(plan: Floorplan): Float64Array {
	return solved(plan).point.voltage.map((volts) => 1 - volts);
}

function largestDifference(a: Float64Array, b: Float64Array): number {
	expect(a.length).toBe(b.length);
	return a.reduce((most, value, i) => Math.max(most, Math.abs(value - b[i])), 0);
}

function largest(values: Float64Array): number {
	return values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

function scaledLoads(parts: RailParts, factor: number): RailParts {
	return { ...parts, loads: parts.loads.map((load) => ({ ...load, amps: load.amps * factor })) };
}

describe('any network', () => {
	it('CV-01, CV-02: currents and powers balance to 1e-9, and the sources give what the loads take', () => {
		fc.assert(
			fc.property(railParts(20), fc.constantFrom(0, 0.01, LINEAR_A), (parts, sinkA) => {
				const { point } = solved(railPlan(parts, sinkA));
				expect(point.proof.kclRelative).toBeLessThan(1e-9);
				expect(point.proof.powerRelative).toBeLessThan(1e-9);
				expect(point.proof.statesConsistent).toBe(true);
				const given = point.regulatorAmps.reduce((sum, amps) => sum + amps, 0);
				const taken = parts.loads.reduce((sum, { amps }) => sum + amps, 0);
				expect(Math.abs(given - taken)).toBeLessThan(1e-9 * taken);
			}),
			RUNS
		);
	});

	it('CV-05: drops of two load patterns add up while every unit keeps its state', () => {
		fc.assert(
			fc.property(railParts(0), (parts) => {
				const half = Math.ceil(parts.loads.length / 2);
				// A pattern without loads would have no block to keep: its currents are 0 instead.
				const only = (keep: (k: number) => boolean) =>
					drops(
						railPlan(
							{
								...parts,
								loads: parts.loads.map((load, k) => (keep(k) ? load : { ...load, amps: 0 }))
							},
							LINEAR_A
						)
					);
				const first = only((k) => k < half);
				const second = only((k) => k >= half);
				const both = only(() => true);
				const sum = first.map((value, node) => value + second[node]);
				expect(largestDifference(both, sum)).toBeLessThan(1e-9 * largest(both) + 1e-14);
			}),
			RUNS
		);
	});

	it('CV-06: raising a resistance never lowers a two-point resistance (Rayleigh)', () => {
		fc.assert(
			fc.property(railParts(0), fc.constantFrom('sheet', 'via'), (parts, what) => {
				// One unit and one load: their drop is a two-point resistance (and the unit's own).
				const pair = {
					...parts,
					regulators: parts.regulators.slice(0, 1),
					loads: parts.loads.slice(0, 1)
				};
				const raised =
					what === 'sheet'
						? { ...pair, bondOhm: pair.bondOhm * 1.7 }
						: { ...pair, viaOhm: pair.viaOhm * 1.7 };
				const at = (rail: RailParts) => solved(railPlan(rail, 0)).result.blocks[0].worstDropV;
				expect(at(raised)).toBeGreaterThanOrEqual(at(pair) * (1 - 1e-12));
			}),
			RUNS
		);
	});

	it('CV-07: no node lies above the highest source, and the lowest carries a load', () => {
		fc.assert(
			fc.property(railParts(20), (parts) => {
				const { point, network } = solved(railPlan(parts, 0));
				const highest = Math.max(...point.regulatorSetV);
				const lowest = point.voltage.reduce((least, volts) => Math.min(least, volts), Infinity);
				point.voltage.forEach((volts) => expect(volts).toBeLessThanOrEqual(highest + 1e-12));
				const loaded = Array.from(network.loads.node, (node) => point.voltage[node]);
				expect(Math.min(...loaded)).toBeLessThanOrEqual(lowest + 1e-12);
			}),
			RUNS
		);
	});

	it('CV-08: all resistances times k, every drop times k', () => {
		fc.assert(
			fc.property(railParts(0), fc.constantFrom(0.5, 3), (parts, factor) => {
				const plan = railPlan(parts, LINEAR_A);
				const corner = {
					...plan.corners[0],
					id: 'scaled',
					metalScale: factor,
					outputOhmScale: factor
				};
				const before = drops(plan);
				const after = drops({ ...plan, corners: [corner] });
				const expected = before.map((value) => factor * value);
				expect(largestDifference(after, expected)).toBeLessThan(1e-10 * largest(expected) + 1e-14);
			}),
			RUNS
		);
	});

	it('CV-08: all loads times k with zero offsets, every drop times k', () => {
		fc.assert(
			fc.property(railParts(0), fc.constantFrom(0.25, 4), (parts, factor) => {
				const expected = drops(railPlan(parts, LINEAR_A)).map((value) => factor * value);
				const after = drops(railPlan(scaledLoads(parts, factor), LINEAR_A));
				expect(largestDifference(after, expected)).toBeLessThan(1e-10 * largest(expected) + 1e-14);
			}),
			RUNS
		);
	});
});

describe('what a placer relies on', () => {
	it('the drop behind feeds of 0 ohm scales with metalScale', () => {
		fc.assert(
			fc.property(fc.constantFrom(0.8, 1.3, 2), fc.integer({ min: 1, max: 99 }), (scale, xUm) => {
				const plan = ladderPlan(
					{ kind: 'input', totalOhm: 0.1 },
					{
						feeds: [feedAt('f', 'vdd', 0, 0, 0)],
						blocks: [loadAt('load', 'vdd', xUm, 0, 0.5)]
					}
				);
				const worst = (metalScale: number) =>
					solved({ ...plan, corners: [{ ...plan.corners[0], metalScale }] }).result.nets[0]
						.worstDropV;
				expect(worst(scale)).toBeCloseTo(scale * worst(1), 12);
			}),
			RUNS
		);
	});

	it('one more regulator never raises the worst drop of a linear net', () => {
		fc.assert(
			fc.property(railParts(0), fc.nat(8), fc.nat(8), (parts, column, row) => {
				const added = {
					column: Math.min(column, parts.columns - 1),
					row: Math.min(row, parts.rows - 1),
					offsetV: 0
				};
				const more = { ...parts, regulators: [...parts.regulators, added] };
				const worst = (rail: RailParts) =>
					solved(railPlan(rail, LINEAR_A)).result.nets[0].worstDropV;
				expect(worst(more)).toBeLessThanOrEqual(worst(parts) + 1e-12);
			}),
			RUNS
		);
	});

	it('a mirrored plan gives the mirrored map', () => {
		fc.assert(
			fc.property(railParts(10), (parts) => {
				const mirrored = {
					...parts,
					regulators: parts.regulators.map((unit) => ({
						...unit,
						column: parts.columns - 1 - unit.column
					})),
					loads: parts.loads.map((load) => ({ ...load, column: parts.columns - 1 - load.column }))
				};
				const map = mapOf(railPlan(parts, 0));
				const mirror = mapOf(railPlan(mirrored, 0));
				expect(map.cellNm).toBe((RAIL_PITCH_UM * 1000) / 2);
				for (let row = 0; row < map.rows; row++) {
					for (let column = 0; column < map.columns; column++) {
						const here = map.dropV[row * map.columns + column];
						const there = mirror.dropV[row * map.columns + map.columns - 1 - column];
						if (Number.isNaN(here)) expect(there).toBeNaN();
						else expect(Math.abs(here - there)).toBeLessThan(1e-7);
					}
				}
			}),
			RUNS
		);
	});
});

function mapOf(plan: Floorplan) {
	const network = meshOf(plan);
	const outcome = outcomeOf(plan, network);
	if (outcome.status !== 'solved') throw new Error(JSON.stringify(outcome));
	const { point } = readingOf(plan, network, outcome.point);
	const map = buildDropMap(plan, network, point, 'vdd');
	if (map === null) throw new Error('the net has no nodes');
	return map;
}
