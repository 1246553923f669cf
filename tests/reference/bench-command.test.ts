/** The contract of `npm run -s bench` (model sections 8 and 9), on the command itself; no times. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { meshFloorplan } from '#lib/mesh/index.ts';
import { relativeResidual } from '#lib/sparse/index.ts';
import { makeBenchPlan } from '../../src/cli/bench-plan.ts';
import { readColumns, readMatrix } from '../../src/cli/matrix-market.ts';

const command = fileURLToPath(new URL('../../src/cli/bench.ts', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'bench-command-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function bench(...args: string[]) {
	const { status, stdout, stderr } = spawnSync(
		process.execPath,
		['--import', 'tsx', command, ...args],
		{ encoding: 'utf8' }
	);
	return { status, stdout, stderr };
}

const file = (name: string) => join(folder, name);

describe('bench', () => {
	it.each([
		['uniform', 1e-11],
		['irregular', 1e-11],
		['strong', 5e-11]
	])('solves the %s case, of about the wanted size, in one line', (kind, mostResidual) => {
		const { status, stdout, stderr } = bench('--nodes', '4000', '--case', kind, '--json');
		expect([status, stderr, stdout.trimEnd().split('\n').length]).toEqual([0, '', 1]);
		const line = JSON.parse(stdout);
		expect(Object.keys(line)).toEqual([
			'nodes',
			'nonzeros',
			'case',
			'threads',
			'method',
			'seconds',
			'iterations',
			'residual',
			'peakMb'
		]);
		expect(Object.keys(line.seconds)).toEqual(['build', 'analyse', 'factor', 'solve', 'total']);
		expect(line.case).toBe(kind);
		expect(Math.abs(line.nodes / 4000 - 1)).toBeLessThan(0.05);
		expect(line.residual).toBeLessThan(mostResidual);
	});

	it('the cut-outs leave no piece of the grid without a regulator, whatever the size', () => {
		for (let nodes = 500; nodes < 20_000; nodes = Math.round(nodes * 1.15)) {
			expect([nodes, meshFloorplan(makeBenchPlan(nodes, 'irregular')).status]).toEqual([
				nodes,
				'meshed'
			]);
		}
	});

	it('solves the system that it wrote, with and without coordinates', async () => {
		const system = [file('A.mtx'), file('b.mtx'), file('xy.mtx')];
		expect(bench('--nodes', '2000', '--case', 'strong', '--dump', ...system).status).toBe(0);
		const given = ['--matrix', system[0], '--rhs', system[1], '--out', file('x.mtx')];
		const matrix = await readMatrix(system[0]);
		const [b] = await readColumns(system[1], 1);
		for (const coords of [['--coords', system[2]], []]) {
			const { status, stdout, stderr } = bench(...given, ...coords);
			expect([status, stderr]).toEqual([0, '']);
			expect(JSON.parse(stdout)).toMatchObject({ nodes: matrix.n, case: 'matrix' });
			const [x] = await readColumns(file('x.mtx'), 1);
			expect(relativeResidual(matrix, x, b)).toBeLessThan(5e-11);
		}
	});

	it('with repeats tells their spread; edits and studies have a line each', () => {
		const { status, stdout } = bench('--nodes', '3000', '--repeats', '3', '--edits', '--studies');
		expect(status).toBe(0);
		const [solve, studies, edits] = stdout
			.trimEnd()
			.split('\n')
			.map((line) => JSON.parse(line));
		expect(solve.repeats).toBe(3);
		expect(Object.keys(solve.p95)).toEqual(Object.keys(solve.seconds));
		expect(Object.keys(studies.studies.ms)).toEqual([
			'portMatrix',
			'singleCurrents',
			'pairCurrents',
			'singleMaps',
			'mismatchMaps'
		]);
		expect(Object.keys(edits.edits.ms)).toEqual(['moveCurrents', 'moveMap', 'loadMap', 'strapMap']);
		expect(edits.edits.residual).toBeLessThan(1e-11);
	});

	it.each<[string[], RegExp]>([
		[['--threads', '3'], /^--threads: 3 \(expected 1 or 2\)\n$/],
		[['--repeats', '0'], /^--repeats: 0 \(expected a whole number of 1 or more\)\n$/],
		[['--matrix', 'A.mtx', '--rhs', 'b.mtx', '--edits'], /^--edits, --studies: need the plan/],
		[['--case', 'odd'], /^--case: odd \(expected uniform, irregular, strong\)\n$/],
		[['--nodes', '1'], /^--nodes: 1 \(expected a whole number of 2 or more\)\n$/],
		[['--matrix', 'A.mtx'], /^arguments: --matrix and --rhs go together/],
		[['--coords', 'xy.mtx'], /^--coords: no system to place/],
		[['--dump', 'A.mtx'], /^arguments: unexpected end/],
		[['--matrix', 'none.mtx', '--rhs', 'b.mtx'], /^none\.mtx: ENOENT/]
	])('%j is refused in one line', (args, message) => {
		const { status, stdout, stderr } = bench(...args);
		expect([status, stdout]).toEqual([2, '']);
		expect(stderr).toMatch(message);
	});
});
