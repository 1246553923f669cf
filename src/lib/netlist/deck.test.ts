import { describe, expect, test } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { NM_PER_UM } from '#lib/floorplan/index.ts';
import { feedAt, latticePlan, loadAt, regulatorAt } from '../../../tests/support/plans.ts';
import { meshOf } from '../../../tests/support/solving.ts';
import { nodeNames, writeDeck } from './index.ts';

function deckOf(plan: Floorplan): string[] {
	const written = writeDeck(plan, meshOf(plan), { mode: plan.modes[0], corner: plan.corners[0] });
	if (written.status === 'refused') throw new Error(JSON.stringify(written.problems));
	expect(written.deck.endsWith('\n')).toBe(true);
	return written.deck.trimEnd().split('\n');
}

const plan = latticePlan(
	{ columns: 2, rows: 2, viaOhm: 0.5 },
	{
		name: 'First\nsecond line',
		regulators: [
			regulatorAt('R.1', 'vdd', 0, 0),
			regulatorAt('r/1', 'vdd', 10, 0, { enabled: false })
		],
		blocks: [
			loadAt('cpu', 'vdd', 10, 10, 0.3),
			loadAt('cache', 'vdd', 10, 10, 0.2, { voltageExponent: 1 }),
			loadAt('dark', 'vdd', 10, 10, 0)
		]
	}
);

describe('the text of a deck', () => {
	test('it has a title line, .op and .end, and stays on one line where a name does not', () => {
		const lines = deckOf(plan);
		expect(lines[0]).toBe('Manyweir: First second line, mode default, corner nominal');
		expect(lines.at(-2)).toBe('.op');
		expect(lines.at(-1)).toBe('.end');
	});

	test('every resistor of the network is a card between named nodes', () => {
		const lines = deckOf(plan);
		expect(lines).toContain('r1 n_vdd_m1_0_0 n_vdd_m1_10000_0 1');
		expect(lines).toContain('r5 n_vdd_m1_0_0 n_vdd_m2_0_0 0.5');
		expect(lines.filter((line) => /^r\d+ /.test(line))).toHaveLength(8);
	});

	test('loads are cards by their law; a block without current has none', () => {
		const lines = deckOf(plan);
		expect(lines).toContain('gl1 n_vdd_m1_10000_10000 0 n_vdd_m1_10000_10000 0 0.2');
		expect(lines.filter((line) => /^[bgi]l\d+ /.test(line))).toHaveLength(2);
		expect(lines.some((line) => line.includes('block dark'))).toBe(false);
	});

	test('ids that differ only in signs or case get different safe names, mapped by comments', () => {
		const lines = deckOf({
			...plan,
			regulators: plan.regulators.map((r) => ({ ...r, enabled: true }))
		});
		expect(lines).toContain('* regulator R.1, cell unit');
		expect(lines.some((line) => line.startsWith('br_r_1 '))).toBe(true);
		expect(lines).toContain('* regulator r/1, cell unit');
		expect(lines.some((line) => line.startsWith('br_r_1_2 '))).toBe(true);
		expect(deckOf(plan)).toContain('* regulator r/1: off');
	});

	test('nodes at one place and below zero have names of their own', () => {
		const shifted: Floorplan = {
			...plan,
			die: { outline: plan.die.outline.map(([x, y]) => [x - 10, y]) },
			straps: [...plan.straps, { ...plan.straps[0], id: 'again' }],
			regulators: [{ ...plan.regulators[0], xUm: -11 }],
			blocks: []
		};
		const network = meshOf(shifted);
		const { names, comments } = nodeNames(shifted, network);
		expect(new Set(names).size).toBe(network.nodes.count);
		names.forEach((name, node) => {
			const x = network.nodes.xNm[node];
			const place = `${x < 0 ? `m${-x}` : x}_${network.nodes.yNm[node]}`;
			expect(name).toMatch(new RegExp(`^n_vdd_m[12]_${place}(_2)?$`));
		});
		expect(names).toContain('n_vdd_m1_m10000_0');
		expect(comments).toHaveLength(4);
		expect(comments[0]).toBe(
			`* node n_vdd_m1_m10000_0_2: another node of net vdd on layer m1 at ${-10 * NM_PER_UM} nm, 0 nm`
		);
	});

	test('a feed without series resistance holds its node, once', () => {
		const input = latticePlan(
			{ columns: 2, rows: 2, kind: 'input', volts: 1.2 },
			{
				feeds: [
					feedAt('a', 'vdd', 0, 0, 0),
					feedAt('b', 'vdd', 0, 0, 0),
					feedAt('c', 'vdd', 10, 10, 0.25)
				],
				modes: [{ id: 'low', inputVolts: { vdd: 1.1 } }]
			}
		);
		const lines = deckOf(input);
		expect(lines).toContain('vf_a n_vdd_m2_0_0 0 1.1');
		expect(lines).toContain('* feed b: its node is already held by feed a');
		expect(lines).toContain('vs_vdd s_vdd 0 1.1');
		expect(lines).toContain('rf_c s_vdd n_vdd_m2_10000_10000 0.25');
	});

	test('a corner without resistances is refused', () => {
		const frozen: Floorplan = {
			...plan,
			layers: [{ ...plan.layers[0], tempCoPerC: 0.01 }, plan.layers[1]]
		};
		const corner = { ...plan.corners[0], temperatureC: -200 };
		expect(writeDeck(frozen, meshOf(frozen), { mode: plan.modes[0], corner })).toMatchObject({
			status: 'refused',
			problems: [{ path: 'corners (nominal)' }]
		});
	});
});
