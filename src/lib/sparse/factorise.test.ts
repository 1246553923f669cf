import fc from 'fast-check';
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
	assemble,
	backwardError,
	besideEachOther,
	dense,
	factorOf,
	graphs,
	lattice,
	naturalOrder,
	panelsOf,
	star,
	upTo,
	type Graph
} from '../../../tests/support/graphs.ts';
import {
	analyse,
	assembleEntries,
	factorBytes,
	factorise,
	multiply,
	orderMinimumDegree,
	orderNestedDissection,
	solveWith
} from './index.ts';

describe('factorisation and solution', () => {
	it('agrees with a dense Cholesky of a general package on random graphs', () => {
		fc.assert(
			fc.property(graphs, fc.boolean(), (graph, hasPlaces) => {
				const matrix = assemble(graph);
				const b = Float64Array.from({ length: graph.n }, (_, i) => Math.cos(3 * i));
				const expected = new CholeskyDecomposition(dense(matrix)).solve(Matrix.columnVector(b));
				const order = hasPlaces
					? orderNestedDissection(matrix, graph.x, graph.y)
					: orderMinimumDegree(matrix);
				const x = solveWith(factorOf(matrix, order), b);
				const scale = Math.max(...expected.getColumn(0).map(Math.abs));
				x.forEach((value, i) =>
					expect(Math.abs(value - expected.get(i, 0))).toBeLessThan(1e-10 * scale)
				);
			})
		);
	});

	it('finds the factor that a matrix was made from', () => {
		// L: 2 on the diagonal, -1 / (i - j) in row i at the columns j = i - 1 and i - 7.
		const n = 60;
		const factor = Matrix.zeros(n, n);
		for (let i = 0; i < n; i++) {
			factor.set(i, i, 2);
			for (const j of [i - 1, i - 7]) if (j >= 0) factor.set(i, j, -1 / (i - j));
		}
		const product = factor.mmul(factor.transpose());
		const entries: [i: number, j: number, value: number][] = [];
		for (let i = 0; i < n; i++) {
			for (let j = 0; j <= i; j++) {
				if (product.get(i, j) !== 0) entries.push([i, j, product.get(i, j)]);
			}
		}
		const matrix = assembleEntries(
			n,
			Int32Array.from(entries, ([i]) => i),
			Int32Array.from(entries, ([, j]) => j),
			Float64Array.from(entries, ([, , value]) => value)
		);
		const factored = factorOf(matrix, naturalOrder(matrix));
		const { symbolic } = factored;
		const panels = panelsOf(factored);
		const { perm, supernodes, start, rowStart, rows, panelStart } = symbolic;
		// The postorder of a matrix with a full subdiagonal leaves the order alone.
		expect([...perm]).toEqual([...upTo(n)]);
		for (let s = 0; s < supernodes; s++) {
			const width = start[s + 1] - start[s];
			for (let p = rowStart[s]; p < rowStart[s + 1]; p++) {
				for (let k = 0; k < width && start[s] + k <= rows[p]; k++) {
					const value = panels[panelStart[s] + (p - rowStart[s]) * width + k];
					expect(value).toBeCloseTo(factor.get(rows[p], start[s] + k), 13);
				}
			}
		}
	});

	const contrast = (exponent: number) => (e: number) => (e % 3 === 0 ? 10 ** exponent : 1);
	const isolated: Graph = { ...lattice(5, 1), from: [], to: [], conductance: [] };
	isolated.tie.fill(2);

	it.each<[string, Graph]>([
		['one node', lattice(1, 1)],
		['two nodes', lattice(2, 1)],
		['a chain', lattice(400, 1)],
		['a long lattice', lattice(150, 7)],
		['a star', star(300)],
		['a conductance contrast of 1e6', lattice(60, 60, contrast(6))],
		['a conductance contrast of 1e12', lattice(60, 60, contrast(12))],
		['conductances from 1e-6 to 1e6', lattice(60, 60, (e) => 10 ** (((e * 7) % 13) - 6))],
		['isolated nodes', isolated],
		['separate parts', besideEachOther(lattice(30, 9), isolated, star(40), lattice(1, 50))]
	])('%s is solved to rounding, with and without coordinates', (_name, graph) => {
		const matrix = assemble(graph);
		const b = Float64Array.from({ length: graph.n }, (_, i) => Math.sin(i + 1));
		for (const order of [
			orderNestedDissection(matrix, graph.x, graph.y),
			orderMinimumDegree(matrix),
			naturalOrder(matrix)
		]) {
			const x = solveWith(factorOf(matrix, order), b);
			expect(backwardError(matrix, x, b)).toBeLessThan(1e-14);
		}
	});

	it('finds again the solution that the right-hand side was made from', () => {
		const graph = lattice(40, 30, (e) => 1 + (e % 5));
		const matrix = assemble(graph);
		const known = Float64Array.from({ length: graph.n }, (_, i) => 1 + Math.sin(i) / 3);
		const x = solveWith(
			factorOf(matrix, orderNestedDissection(matrix, graph.x, graph.y)),
			multiply(matrix, known)
		);
		x.forEach((value, i) => expect(value).toBeCloseTo(known[i], 9));
	});

	// A chain of n unit resistors tied to 0 V by 1 ohm and fed 1 A at its far end: node k at k + 1 V.
	it('a chain has the voltages of its resistances in series', () => {
		const graph = lattice(1000, 1);
		const matrix = assemble(graph);
		const b = new Float64Array(1000);
		b[999] = 1;
		const x = solveWith(factorOf(matrix, orderNestedDissection(matrix, graph.x, graph.y)), b);
		x.forEach((value, k) => expect(value / (k + 1)).toBeCloseTo(1, 10));
	});

	it('keeps the analysis for new values of the same pattern', () => {
		const graph = lattice(20, 20);
		const first = assemble(graph);
		const symbolic = analyse(first, orderNestedDissection(first, graph.x, graph.y));
		const second = assemble({
			...graph,
			conductance: graph.conductance.map((g, e) => g * (1 + (e % 4)))
		});
		const b = new Float64Array(graph.n).fill(1);
		const result = factorise(symbolic, second);
		if (result.status !== 'factorised') throw new Error(result.status);
		expect(backwardError(second, solveWith(result.factor, b), b)).toBeLessThan(1e-15);
		expect(() => factorise(symbolic, assemble(lattice(21, 19)))).toThrow(/analysed were 400/);
	});
});

describe('refusals', () => {
	it('reports the row whose pivot is not positive', () => {
		const matrix = assemble({ ...lattice(3, 1), tie: [0, 0, 0] });
		const result = factorise(analyse(matrix, naturalOrder(matrix)), matrix);
		expect(result).toEqual({ status: 'not-positive-definite', row: 2 });
	});

	it('reports a row of the matrix, not its place in the order', () => {
		const graph = besideEachOther(lattice(8, 8), lattice(1, 1));
		graph.tie[64] = -1;
		const matrix = assemble(graph);
		for (const order of [
			orderNestedDissection(matrix, graph.x, graph.y),
			orderMinimumDegree(matrix)
		]) {
			expect(factorise(analyse(matrix, order), matrix)).toEqual({
				status: 'not-positive-definite',
				row: 64
			});
		}
	});

	it('refuses entries that are no numbers', () => {
		const matrix = assemble({ ...lattice(2, 1), conductance: [NaN] });
		const result = factorise(analyse(matrix, naturalOrder(matrix)), matrix);
		expect(result).toEqual({ status: 'not-positive-definite', row: 0 });
	});

	it('refuses a factor beyond the limit with both sizes', () => {
		const matrix = assemble(lattice(30, 30));
		const symbolic = analyse(matrix, naturalOrder(matrix));
		expect(factorise(symbolic, matrix, { limitBytes: 1000 })).toEqual({
			status: 'too-large',
			bytes: factorBytes(symbolic),
			limitBytes: 1000
		});
		expect(factorise(symbolic, matrix, { limitBytes: factorBytes(symbolic) }).status).toBe(
			'factorised'
		);
	});

	it('refuses a factor that 32-bit pointers do not reach, before allocating it', () => {
		const matrix = assemble(lattice(3, 3));
		const huge = { ...analyse(matrix, naturalOrder(matrix)), panelValues: 2 ** 29 };
		expect(factorise(huge, matrix)).toEqual({
			status: 'too-large',
			bytes: factorBytes(huge),
			limitBytes: 4 * 1024 ** 3
		});
	});
});
