import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	assemble,
	factorOf,
	graphs,
	lattice,
	naturalOrder,
	panelsOf
} from '../../../tests/support/graphs.ts';
import { factorisePlainly, lowerPanels } from '../../../tests/support/plain-cholesky.ts';
import {
	analyse,
	assembleEntries,
	createPorts,
	factorise,
	orderMinimumDegree,
	orderNestedDissection,
	relativeResidual,
	releaseFactor,
	solveBlockWith,
	type EliminationOrder,
	type SymmetricMatrix
} from './index.ts';

/** A full matrix: one panel, with so many rows as own columns. */
function fullMatrix(n: number, seed: number): SymmetricMatrix {
	const row: number[] = [];
	const column: number[] = [];
	const value: number[] = [];
	for (let i = 0; i < n; i++) {
		for (let j = 0; j <= i; j++) {
			row.push(i);
			column.push(j);
			value.push(i === j ? n : Math.sin(seed + 7 * i + 3 * j));
		}
	}
	return assembleEntries(
		n,
		Int32Array.from(row),
		Int32Array.from(column),
		Float64Array.from(value)
	);
}

function expectAsPlain(matrix: SymmetricMatrix, order: EliminationOrder): void {
	const symbolic = analyse(matrix, order);
	const expected = factorisePlainly(symbolic, matrix);
	const found = factorise(symbolic, matrix);
	if (!(expected instanceof Float64Array) || found.status !== 'factorised') {
		expect(found).toEqual({ status: 'not-positive-definite', ...expected });
		return;
	}
	const panels = lowerPanels(symbolic, panelsOf(found.factor));
	const scale = expected.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
	expected.forEach((value, p) =>
		expect(Math.abs(panels[p] - value)).toBeLessThanOrEqual(1e-13 * scale)
	);
}

describe('numeric kernels', () => {
	it('give the factor of the plain algorithm on random graphs', () => {
		fc.assert(
			fc.property(graphs, fc.boolean(), (graph, hasPlaces) => {
				const matrix = assemble(graph);
				expectAsPlain(
					matrix,
					hasPlaces ? orderNestedDissection(matrix, graph.x, graph.y) : orderMinimumDegree(matrix)
				);
			})
		);
	});

	it('give it for panels of every width', () => {
		for (let n = 1; n <= 70; n++) {
			const matrix = fullMatrix(n, n);
			expectAsPlain(matrix, naturalOrder(matrix));
		}
	});

	it('give it for panels with rows below, in a tree of several levels', () => {
		for (const side of [17, 24, 41]) {
			const graph = lattice(side, side + 3, (e) => 1 + (e % 9));
			const matrix = assemble(graph);
			expectAsPlain(matrix, orderNestedDissection(matrix, graph.x, graph.y));
		}
	});

	it.each([
		[0, 0],
		[3, -1],
		[40, NaN],
		[49, Infinity]
	])('name row %i, whose pivot becomes %d', (row, pivot) => {
		const matrix = fullMatrix(50, 1);
		for (let i = 0; i < 50; i++) {
			for (let p = matrix.rowStart[i]; p < matrix.rowStart[i + 1]; p++) {
				const isDiagonal = matrix.column[p] === i;
				matrix.value[p] = isDiagonal ? (i === row ? pivot : 1) : 0;
			}
		}
		expect(factorise(analyse(matrix, naturalOrder(matrix)), matrix)).toEqual({
			status: 'not-positive-definite',
			row
		});
	});

	it('take over the memory of a factor of the same analysis', () => {
		const graph = lattice(30, 30);
		const first = assemble(graph);
		const symbolic = analyse(first, orderNestedDissection(first, graph.x, graph.y));
		const old = factorOf(first, orderNestedDissection(first, graph.x, graph.y));
		const second = assemble({ ...graph, conductance: graph.conductance.map((g) => 3 * g) });
		const fresh = factorise(symbolic, second);
		const before = factorise(symbolic, first);
		if (fresh.status !== 'factorised' || before.status !== 'factorised') throw new Error('refused');
		const { factor } = before;
		const replaced = factorise(symbolic, second, { replaces: factor });
		if (replaced.status !== 'factorised') throw new Error(replaced.status);
		expect(replaced.factor.space).toBe(factor.space);
		expect(panelsOf(replaced.factor)).toEqual(panelsOf(fresh.factor));
		// One of another analysis is left alone.
		const other = factorise(symbolic, second, { replaces: old });
		if (other.status !== 'factorised') throw new Error(other.status);
		expect(other.factor.space).not.toBe(old.space);
	});

	it('serve the next factor with the memory of a released one, whatever it held', () => {
		const large = lattice(40, 40, (e) => 1 + (e % 3));
		const matrix = assemble(large);
		const first = factorOf(matrix, orderNestedDissection(matrix, large.x, large.y));
		new Float64Array(first.space.memory.buffer).fill(NaN);
		releaseFactor(first);
		// Given back twice it is still one memory.
		releaseFactor(first);
		const graphs = [lattice(35, 37), lattice(12, 90, (e) => 1 + (e % 5))];
		const factors = graphs.map((graph) => {
			const other = assemble(graph);
			return factorOf(other, orderNestedDissection(other, graph.x, graph.y));
		});
		expect(factors.some(({ space }) => space.memory === first.space.memory)).toBe(true);
		expect(factors[0].space.memory).not.toBe(factors[1].space.memory);
		factors.forEach((factor, k) => {
			const other = assemble(graphs[k]);
			const b = Float64Array.from({ length: other.n * 3 }, (_, i) => Math.sin(i));
			const x = solveBlockWith(factor, b, 3);
			const ports = createPorts(factor, [0, other.n - 1]);
			for (let c = 0; c < 3; c++) {
				const column = [c * other.n, (c + 1) * other.n] as const;
				expect(relativeResidual(other, x.slice(...column), b.slice(...column))).toBeLessThan(1e-11);
			}
			expect(ports.at(0, 1)).toBeGreaterThan(0);
		});
	});
});
