import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { assemble, factorOf, graphs, lattice } from '../../../tests/support/graphs.ts';
import {
	orderMinimumDegree,
	orderNestedDissection,
	createPorts,
	refine,
	relativeResidual,
	solveBlockWith,
	solveWith
} from './index.ts';

describe('blocks of right-hand sides', () => {
	it('give what each gives alone, for any number of them', () => {
		fc.assert(
			fc.property(graphs, fc.integer({ min: 0, max: 19 }), (graph, count) => {
				const matrix = assemble(graph);
				const factor = factorOf(matrix, orderMinimumDegree(matrix));
				const b = Float64Array.from({ length: graph.n * count }, (_, i) => Math.sin(1 + i * i));
				const given = b.slice();
				const x = solveBlockWith(factor, b, count);
				expect(b).toEqual(given);
				for (let c = 0; c < count; c++) {
					const alone = solveWith(factor, b.slice(c * graph.n, (c + 1) * graph.n));
					const scale = Math.max(...alone.map(Math.abs));
					alone.forEach((value, i) =>
						expect(Math.abs(x[c * graph.n + i] - value)).toBeLessThan(1e-12 * scale)
					);
				}
			})
		);
	});

	it('may be overwritten by their solutions', () => {
		const graph = lattice(30, 20);
		const matrix = assemble(graph);
		const factor = factorOf(matrix, orderNestedDissection(matrix, graph.x, graph.y));
		const b = Float64Array.from({ length: graph.n * 11 }, (_, i) => Math.cos(i));
		const x = solveBlockWith(factor, b, 11);
		expect(solveBlockWith(factor, b, 11, b)).toBe(b);
		expect(b).toEqual(x);
	});

	it('refuse vectors of another length', () => {
		const matrix = assemble(lattice(2, 2));
		const factor = factorOf(matrix, orderMinimumDegree(matrix));
		expect(() => solveBlockWith(factor, new Float64Array(7), 2)).toThrow(/7 and 8 for 2 times 4/);
		expect(() => solveWith(factor, new Float64Array(3))).toThrow(RangeError);
	});
});

describe('iterative refinement', () => {
	const graph = lattice(40, 40, (e) => 1 + (e % 7));
	const matrix = assemble(graph);
	const order = orderNestedDissection(matrix, graph.x, graph.y);
	const b = Float64Array.from({ length: graph.n }, (_, i) => Math.sin(i));

	it('makes up for a factor of a nearby matrix', () => {
		const nearby = { ...matrix, value: matrix.value.map((value) => value * (1 + 1e-4)) };
		const factor = factorOf(nearby, order);
		const x = solveWith(factor, b);
		expect(relativeResidual(matrix, x, b)).toBeGreaterThan(1e-5);
		const { steps, residual } = refine(matrix, factor, b, x, 10);
		expect(steps).toBeGreaterThan(1);
		expect(residual).toBe(relativeResidual(matrix, x, b));
		expect(residual).toBeLessThan(1e-12);
	});

	it('never leaves an answer worse than it was', () => {
		// The factor of another matrix: its corrections overshoot.
		const other = { ...matrix, value: matrix.value.map((value) => value / 5) };
		const x = solveWith(factorOf(matrix, order), b);
		const before = x.slice();
		expect(refine(matrix, factorOf(other, order), b, x).steps).toBe(0);
		expect(x).toEqual(before);
	});

	it('has nothing to do for a zero right-hand side', () => {
		const zero = new Float64Array(graph.n);
		const x = new Float64Array(graph.n);
		expect(refine(matrix, factorOf(matrix, order), zero, x)).toEqual({ steps: 0, residual: 0 });
	});
});

describe('entries of the inverse between ports', () => {
	it('are what solutions for single amperes give', () => {
		fc.assert(
			fc.property(
				graphs,
				fc.array(fc.nat(), { maxLength: 9 }),
				fc.boolean(),
				(graph, picks, hasPlaces) => {
					const matrix = assemble(graph);
					const order = hasPlaces
						? orderNestedDissection(matrix, graph.x, graph.y)
						: orderMinimumDegree(matrix);
					const factor = factorOf(matrix, order);
					const rows = picks.map((pick) => pick % graph.n);
					const ports = createPorts(factor, rows);
					const all = ports.all();
					rows.forEach((row, a) => {
						const ampere = new Float64Array(graph.n);
						ampere[row] = 1;
						const x = solveWith(factor, ampere);
						const scale = Math.max(...x.map(Math.abs));
						rows.forEach((other, b) => {
							expect(Math.abs(ports.at(a, b) - x[other])).toBeLessThan(1e-12 * scale);
							expect(all[b * rows.length + a]).toBe(ports.at(a, b));
						});
					});
				}
			)
		);
	});
});
