/**
 * Random plans, most of them strained or overloaded: there is always an answer that proves itself,
 * or a reason that says what is short. Loads of rising law leave one operating point or none.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { randomPlans } from '../support/random-plan.ts';
import { meshOf, outcomeOf } from '../support/solving.ts';

const RUNS = { numRuns: 150 };

describe('operating points of strained plans', () => {
	it('constant, resistive and other rising loads: solved with proof, or refused with figures', () => {
		fc.assert(
			fc.property(randomPlans([0, 0, 0.5, 1, 2]), (plan) => {
				const outcome = outcomeOf(plan, meshOf(plan));
				if (outcome.status === 'unsolvable') {
					const [problem] = outcome.problems;
					expect(problem.path).toBe('nets (vdd)');
					expect(problem.wantedA).toBeGreaterThan(problem.availableA ?? Infinity);
					return;
				}
				expect(outcome.status).toBe('solved');
				if (outcome.status !== 'solved') return;
				const { proof } = outcome.point;
				expect(proof.statesConsistent).toBe(true);
				// Relative to the load: of next to no load, rounding of the large conductances is left.
				expect(Math.min(proof.kclRelative, proof.kclMaxA / 1e-2)).toBeLessThan(1e-10);
				expect(proof.powerRelative).toBeLessThan(1e-6);
			}),
			RUNS
		);
	});

	it('constant power: whatever is given as an answer proves itself', () => {
		fc.assert(
			fc.property(randomPlans([-0.5, -1]), (plan) => {
				const outcome = outcomeOf(plan, meshOf(plan));
				if (outcome.status === 'solved') {
					expect(outcome.point.proof.statesConsistent).toBe(true);
					expect(outcome.point.proof.kclRelative).toBeLessThan(1e-6);
					return;
				}
				// Where it runs away, the reason names the block or the net.
				expect(['not-converged', 'unsolvable']).toContain(outcome.status);
				if (outcome.status === 'stopped') return;
				expect(outcome.problems[0].path).toMatch(/^(blocks|nets) \(/);
			}),
			RUNS
		);
	});
});
