/**
 * Decks of random strained plans, fixed by their seeds, in a general circuit simulator (ngspice,
 * from Debian's packages): every node within 1e-6 of nominal (1 V) of the solver's answer.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { nodeNames, writeDeck } from '#lib/netlist/index.ts';
import { runDeck } from '../support/ngspice.ts';
import { randomPlans } from '../support/random-plan.ts';
import { meshOf, outcomeOf } from '../support/solving.ts';

/** Plans with an answer that their loads determine, and the states that occur in them. */
function solvedPlans(exponents: readonly number[], seed: number, wanted: number) {
	return fc
		.sample(randomPlans(exponents), { numRuns: 4 * wanted, seed })
		.flatMap((plan) => {
			const network = meshOf(plan);
			const outcome = outcomeOf(plan, network);
			// Without load a rail whose units are all idle floats: any voltage is an answer.
			const isLoaded = plan.blocks.some(({ amps }) => amps.default > 0);
			return outcome.status === 'solved' && isLoaded
				? [{ plan, network, point: outcome.point }]
				: [];
		})
		.slice(0, wanted);
}

async function largestDeviation(
	plan: Floorplan,
	{ network, point }: Omit<ReturnType<typeof solvedPlans>[number], 'plan'>
): Promise<number> {
	const written = writeDeck(plan, network, {
		mode: plan.modes[0],
		corner: plan.corners[0],
		start: point
	});
	if (written.status === 'refused') throw new Error(JSON.stringify(written.problems));
	const { volts } = await runDeck(written.deck);
	const { names } = nodeNames(plan, network);
	return names.reduce((largest, name, node) => {
		const deviation = Math.abs((volts.get(name) ?? NaN) - point.voltage[node]);
		return deviation <= largest ? largest : deviation;
	}, 0);
}

describe('decks of strained plans', () => {
	test('constant, resistive and other rising loads, every regulator state among them', async () => {
		const plans = solvedPlans([0, 0, 0.5, 1, 2], 7031, 12);
		expect(plans).toHaveLength(12);
		const states = new Set(plans.flatMap(({ point }) => point.regulatorStates));
		expect([...states].sort()).toEqual(['dropout', 'idle', 'limited', 'regulating']);
		expect(plans.some(({ point }) => point.sense.some(({ state }) => state === 'holding'))).toBe(
			true
		);
		expect(plans.some(({ point }) => point.sense.some(({ state }) => state === 'at-range'))).toBe(
			true
		);
		for (const { plan, ...answer } of plans) {
			expect(await largestDeviation(plan, answer)).toBeLessThan(1e-6);
		}
	});

	test('loads of constant power', async () => {
		const plans = solvedPlans([-1], 90217, 6);
		expect(plans).toHaveLength(6);
		for (const { plan, ...answer } of plans) {
			expect(await largestDeviation(plan, answer)).toBeLessThan(1e-6);
		}
	});
});
