import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { assemble, graphs, lattice, star } from '../../../tests/support/graphs.ts';
import { analyse, orderMinimumDegree, orderNestedDissection } from './index.ts';

function isPermutation(order: Int32Array): boolean {
	return Int32Array.from(order)
		.sort()
		.every((i, k) => i === k);
}

/** Values in the panels for each node of a square lattice. */
function fillPerNode(side: number, kind: 'dissection' | 'degree'): number {
	const graph = lattice(side, side);
	const matrix = assemble(graph);
	const order =
		kind === 'dissection'
			? orderNestedDissection(matrix, graph.x, graph.y)
			: orderMinimumDegree(matrix);
	return analyse(matrix, order).panelValues / graph.n;
}

describe('nested dissection', () => {
	it('is a permutation, whatever the coordinates', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				expect(isPermutation(orderNestedDissection(assemble(graph), graph.x, graph.y).perm)).toBe(
					true
				);
			})
		);
	});

	it('ends where all nodes are at one place', () => {
		const graph = lattice(9, 9);
		const nowhere = new Float64Array(graph.n);
		expect(isPermutation(orderNestedDissection(assemble(graph), nowhere, nowhere).perm)).toBe(true);
	});

	it('orders the separator of the first cut last', () => {
		const graph = lattice(9, 5);
		const { perm } = orderNestedDissection(assemble(graph), graph.x, graph.y);
		// The median of x is 4: the low side's nodes next to the high side are those at x = 4.
		expect([...perm.slice(-5)].map((i) => graph.x[i])).toEqual([4, 4, 4, 4, 4]);
	});

	// Source: A. George, SIAM J. Numer. Anal. 10 (1973) 345: n log n fill, n^1.5 in a band.
	it('the fill of a lattice grows like n log n', () => {
		const [small, middle, large] = [32, 64, 128].map((side) => fillPerNode(side, 'dissection'));
		// Doubling the side adds a constant to the fill per node; a band order would double it.
		expect(middle / small).toBeLessThan(1.45);
		expect(large / middle).toBeLessThan(1.35);
	});

	it('refuses coordinates that are missing or not finite', () => {
		const matrix = assemble(lattice(2, 1));
		expect(() => orderNestedDissection(matrix, [0], [0, 0])).toThrow(/1 and 2 coordinates for 2/);
		expect(() => orderNestedDissection(matrix, [0, NaN], [0, 0])).toThrow(/node 1 is at NaN, 0/);
	});
});

describe('minimum degree', () => {
	it('is a permutation of any graph', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				expect(isPermutation(orderMinimumDegree(assemble(graph)).perm)).toBe(true);
			})
		);
	});

	it('leaves a tree without fill', () => {
		for (const graph of [lattice(200, 1), star(300)]) {
			const matrix = assemble(graph);
			const inverse = new Int32Array(graph.n);
			orderMinimumDegree(matrix).perm.forEach((node, k) => (inverse[node] = k));
			// Each node has at most one neighbour that is eliminated after it.
			for (let i = 0; i < graph.n; i++) {
				let later = 0;
				for (let p = matrix.rowStart[i]; p < matrix.rowStart[i + 1]; p++) {
					if (inverse[matrix.column[p]] > inverse[i]) later++;
				}
				expect(later).toBeLessThanOrEqual(1);
			}
		}
	});

	it('fills a lattice at most half more than nested dissection', () => {
		for (const side of [32, 64, 96]) {
			expect(fillPerNode(side, 'degree') / fillPerNode(side, 'dissection')).toBeLessThan(1.5);
		}
	});
});
