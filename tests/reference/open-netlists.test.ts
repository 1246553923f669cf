/**
 * Two open netlists of the ICCAD 2023 contest (data/README.md), read into the product's own network
 * types, solved by its own solver, and compared at every node with SciPy's general sparse solver,
 * with stored answers and in a run of its own. The test needs python3 with SciPy (Debian: python3-scipy).
 */
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { gunzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { readOpenNetlist } from '../support/open-netlist.ts';
import { runPython } from '../support/python.ts';
import { outcomeOf, readingOf } from '../support/solving.ts';

const pathOf = (name: string) => fileURLToPath(new URL(name, import.meta.url));

/** Lines `node volts`, and `residual value`, by name. */
function readVolts(text: string): Map<string, number> {
	return new Map(
		text
			.trim()
			.split('\n')
			.map((line) => line.split(' '))
			.map(([name, value]) => [name, Number(value)])
	);
}

function solveWithScipy(deck: string): Map<string, number> {
	return readVolts(runPython(pathOf('solve_netlist.py'), deck));
}

// Figures of the netlists as published beside them.
const netlists = [
	{
		name: 'fake27',
		unknowns: 10_281,
		resistors: 11_369,
		loads: 8_514,
		totalA: 2.593737275e-3,
		worstDropV: 2.768879e-3,
		atUm: [204, 112.8],
		meanDropV: 1.051205e-3
	},
	{
		name: 'real11',
		unknowns: 9_927,
		resistors: 10_860,
		loads: 7_718,
		totalA: 4.577897804e-3,
		worstDropV: 5.064102e-3,
		atUm: [199.2, 139.2],
		meanDropV: 2.066834e-3
	}
] as const;

describe.each(netlists)('open netlist $name', (published) => {
	const deck = pathOf(`data/iccad23-${published.name}.sp.gz`);
	const netlist = readOpenNetlist(deck);
	const { floorplan, network, nodeNames } = netlist;
	const outcome = outcomeOf(floorplan, network);
	if (outcome.status !== 'solved') throw new Error(JSON.stringify(outcome));
	const { point } = outcome;

	it('is the netlist that was published', () => {
		expect(network.nodes.count - network.feeds.node.length).toBe(published.unknowns);
		expect(network.resistors.count).toBe(published.resistors);
		expect(netlist.loadCount).toBe(published.loads);
		expect(netlist.totalLoadA).toBeCloseTo(published.totalA, 11);
	});

	it('drops most where it was published, and by as much', () => {
		const { nets } = readingOf(floorplan, network, point).result;
		expect(nets[0].worstDropV).toBeCloseTo(published.worstDropV, 8);
		expect([nets[0].worst.xUm, nets[0].worst.yUm]).toEqual(published.atUm);
		const onM1 = [...network.nodes.layer.keys()].filter((node) => network.nodes.layer[node] === 0);
		const mean = onM1.reduce((sum, node) => sum + 1.1 - point.voltage[node], 0) / onM1.length;
		// The mean published for fake27 is 1.0e-8 V below that of SciPy's own voltages over its m1
		// nodes, which ours equals; the place and size of the worst drop agree to every digit given.
		expect(Math.abs(mean - published.meanDropV)).toBeLessThan(1.1e-8);
	});

	it('agrees with stored answers of SciPy within 1e-6 V at every node', () => {
		const stored = readVolts(
			gunzipSync(readFileSync(pathOf(`data/iccad23-${published.name}.volts.gz`))).toString('ascii')
		);
		expect(stored.size).toBe(nodeNames.length);
		nodeNames.forEach((name, node) =>
			expect(Math.abs(point.voltage[node] - (stored.get(name) ?? NaN))).toBeLessThan(1e-6)
		);
	});

	it('agrees with a run of SciPy within 1e-9 V, at a residual no larger', () => {
		const live = solveWithScipy(deck);
		const worst = nodeNames.reduce(
			(most, name, node) => Math.max(most, Math.abs(point.voltage[node] - (live.get(name) ?? NaN))),
			0
		);
		expect(worst).toBeLessThan(1e-9);
		expect(live.get('residual')).toBeLessThan(1e-11);
		expect(point.statistics.residual).toBeLessThan(1e-11);
		expect(point.proof.kclRelative).toBeLessThan(1e-10);
	});
});
