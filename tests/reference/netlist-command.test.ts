/** The contract of `npm run -s netlist` (model sections 8 and 9), on the command itself. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { runDeck } from '../support/ngspice.ts';
import { latticePlan, loadAt, regulatorAt } from '../support/plans.ts';

const command = fileURLToPath(new URL('../../src/cli/netlist.ts', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'netlist-command-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function netlist(...args: string[]) {
	const { status, stdout, stderr } = spawnSync(
		process.execPath,
		['--import', 'tsx', command, ...args],
		{ encoding: 'utf8' }
	);
	return { status, stdout, stderr };
}

const plan = latticePlan(
	{ columns: 3, rows: 3, bondOhm: 0.1, viaOhm: 0.01 },
	{
		name: 'Small',
		regulators: [regulatorAt('r1', 'vdd', 0, 0)],
		blocks: [{ ...loadAt('cpu', 'vdd', 20, 20, 0), amps: { run: 0.2, nap: 0.1 } }],
		modes: [{ id: 'run' }, { id: 'nap' }]
	}
);
const planPath = join(folder, 'plan.json');
writeFileSync(planPath, JSON.stringify(plan));

describe('the netlist command', () => {
	it('writes a deck that runs unchanged to standard output', async () => {
		const { status, stdout, stderr } = netlist(planPath);
		expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
		const { volts } = await runDeck(stdout);
		// All current comes from the one unit of 50 mohm.
		expect(volts.get('n_vdd_m1_0_0')).toBeCloseTo(1 - 0.05 * 0.2, 8);
	});

	it('takes the mode and the file that it is given', () => {
		const deckPath = join(folder, 'deck.cir');
		const { status, stdout } = netlist(planPath, '--mode', 'nap', '--out', deckPath);
		expect({ status, stdout }).toEqual({ status: 0, stdout: '' });
		expect(readFileSync(deckPath, 'utf8')).toMatch(/^Manyweir: Small, mode nap, corner nominal\n/);
	});

	it('refuses an unknown corner with the ones that there are', () => {
		expect(netlist(planPath, '--corner', 'hot')).toEqual({
			status: 2,
			stdout: '',
			stderr: '--corner: there is no "hot" in the plan (expected one of nominal)\n'
		});
	});

	it('refuses a load that no source reaches, with block, place and current', () => {
		const islandPath = join(folder, 'island.json');
		writeFileSync(islandPath, JSON.stringify({ ...plan, regulators: [] }));
		const { status, stdout, stderr } = netlist(islandPath);
		expect({ status, stdout }).toEqual({ status: 2, stdout: '' });
		expect(stderr).toBe(
			'blocks (cpu): loads a part of net vdd that has no enabled regulator, at 20, 20 um: ' +
				'wanted there up to 0.2 A, available 0 A (expected straps or vias that join this part to one)\n'
		);
	});

	it('says what is wrong with its arguments and files', () => {
		expect(netlist().stderr).toContain('arguments: 0 plans are named (expected netlist --');
		expect(netlist(planPath, '--speed', '9').status).toBe(2);
		const missing = netlist(join(folder, 'none.json'));
		expect(missing.status).toBe(2);
		expect(missing.stderr).toContain('there is no such file (expected a floorplan file)');
		const unwritable = netlist(planPath, '--out', join(folder, 'none', 'deck.cir'));
		expect(unwritable.status).toBe(2);
		expect(unwritable.stderr).toContain('--out: ');
	});
});
