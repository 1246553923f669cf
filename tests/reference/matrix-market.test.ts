import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
	analyse,
	factorise,
	multiply,
	orderMinimumDegree,
	relativeResidual,
	solveWith,
	type SymmetricMatrix
} from '#lib/sparse/index.ts';
import { readColumns, readMatrix, writeColumns, writeMatrix } from '../../src/cli/matrix-market.ts';

const BUS = 'tests/reference/data/494_bus.mtx';

let folder: string;
beforeAll(async () => {
	folder = await mkdtemp(join(tmpdir(), 'manyweir-mtx-'));
});
afterAll(() => rm(folder, { recursive: true }));

function solve(matrix: SymmetricMatrix, b: Float64Array): Float64Array {
	const result = factorise(analyse(matrix, orderMinimumDegree(matrix)), matrix);
	if (result.status !== 'factorised') throw new Error(result.status);
	return solveWith(result.factor, b);
}

// Source: HB/494_bus of the SuiteSparse Matrix Collection; T. A. Davis, Y. Hu, ACM TOMS 38 (2011) 1.
describe('CV-100: the power network HB/494_bus', () => {
	it('has 494 rows, 1666 entries and the published extreme singular values', async () => {
		const matrix = await readMatrix(BUS);
		expect(matrix.n).toBe(494);
		expect(matrix.column.length).toBe(1666);
		const dense = Matrix.zeros(matrix.n, matrix.n);
		for (let i = 0; i < matrix.n; i++) {
			for (let p = matrix.rowStart[i]; p < matrix.rowStart[i + 1]; p++) {
				dense.set(i, matrix.column[p], matrix.value[p]);
			}
		}
		const { realEigenvalues } = new EigenvalueDecomposition(dense, { assumeSymmetric: true });
		expect(Math.max(...realEigenvalues) / 3.000514e4).toBeCloseTo(1, 6);
		expect(Math.min(...realEigenvalues) / 1.242238e-2).toBeCloseTo(1, 5);
	});

	it('A x = A 1 is solved to 1e-12, off-diagonal row sums notwithstanding (CV-102)', async () => {
		const matrix = await readMatrix(BUS);
		const b = multiply(matrix, new Float64Array(matrix.n).fill(1));
		const x = solve(matrix, b);
		expect(relativeResidual(matrix, x, b)).toBeLessThan(1e-12);
		// Condition 2.4e6: the error of the solution may be that much larger than the residual.
		for (const value of x) expect(Math.abs(value - 1)).toBeLessThan(1e-9);
	});
});

describe('Matrix Market files', () => {
	it('a matrix and columns come back to the last digit', async () => {
		const matrix = await readMatrix(BUS);
		const path = join(folder, 'copy.mtx');
		await writeMatrix(path, matrix);
		const copy = await readMatrix(path);
		expect(copy.column).toEqual(matrix.column);
		expect(copy.value).toEqual(matrix.value);
		const columns = [Float64Array.of(1 / 3, -2e-17, 5), Float64Array.of(0, 1e300, 7)];
		await writeColumns(join(folder, 'xy.mtx'), columns);
		expect(await readColumns(join(folder, 'xy.mtx'), 2)).toEqual(columns);
	});

	it('a general file holds both triangles, and they must agree', async () => {
		const path = join(folder, 'general.mtx');
		const head = '%%MatrixMarket matrix coordinate real general\n% remark\n';
		await writeFile(path, `${head}2 2 4\n1 1 3\n1 2 -1\n2 1 -1\n2 2 2\n`);
		const { rowStart, column, value } = await readMatrix(path);
		expect([[...rowStart], [...column], [...value]]).toEqual([
			[0, 2, 4],
			[0, 1, 0, 1],
			[3, -1, -1, 2]
		]);
		await writeFile(path, `${head}2 2 4\n1 1 3\n1 2 -1\n2 1 -1.5\n2 2 2\n`);
		await expect(readMatrix(path)).rejects.toThrow(/entries \(1, 2\) and \(2, 1\) differ/);
		await writeFile(path, `${head}2 2 3\n1 1 3\n1 2 -1\n2 2 2\n`);
		await expect(readMatrix(path)).rejects.toThrow(/entries \(1, 2\) and \(2, 1\) differ/);
	});

	it.each([
		['2 3 1\n1 1 1\n', /:2: sizes 2 3 1/],
		['2 2 1.5\n1 1 1\n', /:2: sizes 2 2 1\.5/],
		['2 2 1\n3 1 1\n', /:3: "3 1 1" \(expected row, column of 1 to 2, value\)/],
		['2 2 1\n1.5 1 1\n', /:3: "1\.5 1 1"/],
		['2 2 1\n1 1\n', /:3: "1 1"/],
		['2 2 1\n1 1 x\n', /:3: "1 1 x" \(expected finite numbers\)/],
		['2 2 1\n1 1 1\n2 2 1\n', /:4: one entry more than the 1 announced/],
		['2 2 3\n1 1 1\n2 2 1\n', /: 2 entries \(expected 3\)/],
		['', /no sizes/]
	])('refuses the body %j', async (body, message) => {
		const path = join(folder, 'broken.mtx');
		await writeFile(path, `%%MatrixMarket matrix coordinate real symmetric\n${body}`);
		await expect(readMatrix(path)).rejects.toThrow(message);
	});

	it('names file and line of what is wrong', async () => {
		await expect(readMatrix('tests/reference/data/README.md')).rejects.toThrow(
			/README\.md:1: not the header/
		);
		await expect(readColumns(BUS, 1)).rejects.toThrow(/expected a dense array/);
	});
});
