/** The contract of `npm run -s solve` (model sections 8 and 9), on the command itself. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { resultFileSchema } from '#lib/results/index.ts';
import { cellOf, latticePlan, loadAt, regulatorAt } from '../support/plans.ts';
import { solved } from '../support/solving.ts';

const command = fileURLToPath(new URL('../../src/cli/solve.ts', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'solve-command-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function solve(...args: string[]) {
	const { status, stdout, stderr } = spawnSync(
		process.execPath,
		['--import', 'tsx', command, ...args],
		{ encoding: 'utf8' }
	);
	return { status, stdout, stderr };
}

const plan = latticePlan(
	{ columns: 5, rows: 4, bondOhm: 0.1, viaOhm: 0.01 },
	{
		name: 'Small',
		cells: [cellOf('unit', { maxA: 0.4 })],
		regulators: [regulatorAt('r1', 'vdd', 10, 10), regulatorAt('r2', 'vdd', 30, 20)],
		blocks: [
			{ ...loadAt('cpu', 'vdd', 20, 10, 0.3), amps: { run: 0.3, boost: 2 } },
			loadAt('ram', 'vdd', 40, 30, 0, { amps: { run: 0.1 } })
		],
		modes: [{ id: 'run' }, { id: 'boost' }],
		limits: { dropV: 0.005 }
	}
);

function written(name: string, document: unknown): string {
	const path = join(folder, name);
	writeFileSync(path, JSON.stringify(document));
	return path;
}

const planPath = written('plan.json', plan);

describe('solve', () => {
	it('prints one result file and nothing else, in full precision, first mode and corner', () => {
		const { status, stdout, stderr } = solve(planPath);
		expect([status, stderr]).toEqual([0, '']);
		const result = resultFileSchema.parse(JSON.parse(stdout));
		expect([result.mode, result.corner]).toEqual(['run', 'nominal']);
		expect(result.floorplan.name).toBe('Small');
		expect(result.floorplan.sha256).toMatch(/^[0-9a-f]{64}$/);
		const expected = solved(plan).result;
		expect(result.nets).toEqual(expected.nets);
		expect(result.regulators).toEqual(expected.regulators);
		expect(result.blocks.map(({ id }) => id)).toEqual(['cpu', 'ram']);
	});

	it('writes result and nodes where asked, and exits 1 only when strict', () => {
		const out = join(folder, 'result.json');
		const nodes = join(folder, 'nodes.csv');
		expect(solve(planPath, '--out', out, '--nodes', nodes)).toEqual({
			status: 0,
			stdout: '',
			stderr: ''
		});
		const result = resultFileSchema.parse(JSON.parse(readFileSync(out, 'utf8')));
		expect(result.findings.length).toBeGreaterThan(0);
		const lines = readFileSync(nodes, 'utf8').trimEnd().split('\n');
		expect(lines[0]).toBe('net,layer,xUm,yUm,volts');
		expect(lines.length).toBe(1 + result.solver.nodes);
		expect(solve(planPath, '--strict').status).toBe(1);
	});

	it('exits 2 with net, wanted and available current where there is no operating point', () => {
		const { status, stdout, stderr } = solve(planPath, '--mode', 'boost');
		expect([status, stdout]).toEqual([2, '']);
		expect(stderr).toMatch(/^nets \(vdd\): .*2 A.*0\.8 A.*\n$/);
	});

	it.each<[string, string[], RegExp]>([
		['an unknown mode', [planPath, '--mode', 'walk'], /^--mode: .*"walk".*run, boost/],
		['an unknown corner', [planPath, '--corner', 'hot'], /^--corner: .*"hot".*nominal/],
		['an unknown option', [planPath, '--fast'], /^arguments: .*--fast/],
		['no plan', [], /^arguments: /],
		['no such file', [join(folder, 'none.json')], /none\.json: there is no such file/],
		[
			'a dangling reference',
			[written('dangling.json', { ...plan, blocks: [{ ...plan.blocks[0], net: 'vcc' }] })],
			/cpu.*net.*"vcc"/
		],
		[
			'an island with load',
			[written('island.json', { ...plan, regulators: [] })],
			/blocks \(cpu\): .*vdd.*no enabled regulator/
		]
	])('exits 2 with a line that names it: %s', (_name, args, line) => {
		const { status, stdout, stderr } = solve(...args);
		expect([status, stdout]).toEqual([2, '']);
		expect(stderr).toMatch(line);
	});
});
