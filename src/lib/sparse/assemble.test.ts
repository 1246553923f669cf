import { describe, expect, it } from 'vitest';
import { assemble, dense, lattice } from '../../../tests/support/graphs.ts';
import { assembleEntries, assembleLaplacian, planAssembly } from './assemble.ts';

describe('assembly', () => {
	it('sums parallel edges and keeps columns increasing', () => {
		const matrix = assemble({
			n: 3,
			from: [0, 1, 2],
			to: [1, 0, 1],
			conductance: [1, 2, 4],
			tie: [0.5, 0, 0],
			x: [],
			y: []
		});
		expect(dense(matrix).to2DArray()).toEqual([
			[3.5, -3, 0],
			[-3, 7, -4],
			[0, -4, 4]
		]);
		expect([...matrix.column]).toEqual([0, 1, 0, 1, 2, 1, 2]);
	});

	it('stores the diagonal of nodes without edges', () => {
		const plan = planAssembly(3, new Int32Array(0), new Int32Array(0));
		const matrix = assembleLaplacian(plan, new Float64Array(0), Float64Array.of(1, 0, 2));
		expect([[...matrix.rowStart], [...matrix.column], [...matrix.value]]).toEqual([
			[0, 1, 2, 3],
			[0, 1, 2],
			[1, 0, 2]
		]);
	});

	it('overwrites the values of an earlier matrix, leaving nothing of it', () => {
		const graph = lattice(6, 5, (e) => 1 + e);
		const plan = planAssembly(graph.n, Int32Array.from(graph.from), Int32Array.from(graph.to));
		const tie = Float64Array.from(graph.tie);
		const first = assembleLaplacian(plan, Float64Array.from(graph.conductance), tie);
		const second = Float64Array.from(graph.conductance, (g) => g / 3);
		const fresh = assembleLaplacian(plan, second, tie);
		expect(assembleLaplacian(plan, second, tie, first.value).value).toBe(first.value);
		expect(first.value).toEqual(fresh.value);
		expect(() => assembleLaplacian(plan, second, tie, new Float64Array(3))).toThrow(RangeError);
	});

	it('takes either triangle of a matrix, in any order', () => {
		const matrix = assembleEntries(
			3,
			Int32Array.of(2, 0, 0, 2, 1, 1),
			Int32Array.of(2, 1, 0, 1, 1, 2),
			Float64Array.of(5, -1, 3, -0.5, 4, -1.5)
		);
		expect(dense(matrix).to2DArray()).toEqual([
			[3, -1, 0],
			[-1, 4, -2],
			[0, -2, 5]
		]);
	});

	it('refuses an edge that leaves the nodes or returns to its own', () => {
		expect(() => planAssembly(2, Int32Array.of(0), Int32Array.of(2))).toThrow(
			/edge 0 joins 0 and 2/
		);
		expect(() => planAssembly(2, Int32Array.of(1), Int32Array.of(1))).toThrow(RangeError);
	});
});
