/**
 * The deck of the demo in a general circuit simulator (ngspice, from Debian's packages), in its
 * heaviest mode and corner: every node within 1e-6 of nominal of the solver's answer. The straps
 * stand at twice their pitch, since the simulator's equation ordering takes seven minutes for the 50,000
 * nodes of the plan itself (then the largest deviation was 2.0e-9 V).
 */
import { expect, test } from 'vitest';
import { DEMO_SEED, makeDemoFloorplan } from '#lib/demo/index.ts';
import { nodeNames, writeDeck } from '#lib/netlist/index.ts';
import { solveOperatingPoint } from '#lib/solver/index.ts';
import { runDeck } from '../support/ngspice.ts';
import { meshOf } from '../support/solving.ts';

const PITCH_SCALE = 2;
/** Lowest nominal volts among the demo's regulated rails. */
const NOMINAL_V = 1;

test('every state, a slow loop and a load of constant power: the simulator agrees at every node', async () => {
	const floorplan = makeDemoFloorplan(DEMO_SEED, PITCH_SCALE);
	const network = meshOf(floorplan);
	expect(network.nodes.count).toBeGreaterThan(10_000);
	const [mode, corner] = [floorplan.modes[1], floorplan.corners[1]];
	const outcome = solveOperatingPoint(floorplan, network, {
		mode: mode.id,
		corner: corner.id,
		now: () => 0
	});
	if (outcome.status !== 'solved') throw new Error(JSON.stringify(outcome));
	const { point } = outcome;
	expect([...new Set(point.regulatorStates)].sort()).toEqual([
		'dropout',
		'idle',
		'limited',
		'off',
		'regulating'
	]);
	const written = writeDeck(floorplan, network, { mode, corner });
	if (written.status === 'refused') throw new Error(JSON.stringify(written.problems));
	const { volts } = await runDeck(written.deck);
	let largest = 0;
	nodeNames(floorplan, network).names.forEach((name, node) => {
		const deviation = Math.abs((volts.get(name) ?? NaN) - point.voltage[node]);
		if (!(deviation <= largest)) largest = deviation;
	});
	expect(largest / NOMINAL_V).toBeLessThan(1e-6);
});
