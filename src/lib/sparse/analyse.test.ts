import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { assemble, graphs, lattice, upTo } from '../../../tests/support/graphs.ts';
import {
	columnCounts,
	eliminationTree,
	permutedLower,
	postorder,
	type LowerPattern
} from './elimination-tree.ts';
import { analyse, groupColumns, orderMinimumDegree, orderNestedDissection } from './index.ts';

/** Rows of each column of L by eliminating column after column: slow, but without any theory. */
function eliminateNaively(lower: LowerPattern): Set<number>[] {
	const columns = Array.from({ length: lower.n }, (_, j) => new Set([j]));
	for (let i = 0; i < lower.n; i++) {
		for (let p = lower.rowStart[i]; p < lower.rowStart[i + 1]; p++) columns[lower.column[p]].add(i);
	}
	columns.forEach((rows, j) => {
		const below = [...rows].filter((i) => i > j);
		for (const i of below) for (const k of below) if (k >= i) columns[i].add(k);
	});
	return columns;
}

function invert(perm: Int32Array): Int32Array {
	const inverse = new Int32Array(perm.length);
	perm.forEach((old, k) => (inverse[old] = k));
	return inverse;
}

describe('symbolic analysis', () => {
	it('tree and column counts agree with elimination by hand', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				const matrix = assemble(graph);
				const natural = upTo(graph.n);
				const post = postorder(eliminationTree(permutedLower(matrix, natural, natural)));
				const lower = permutedLower(matrix, post, invert(post));
				const parent = eliminationTree(lower);
				const columns = eliminateNaively(lower);
				expect([...parent]).toEqual(
					columns.map((rows, j) => {
						const below = [...rows].filter((i) => i > j);
						return below.length > 0 ? Math.min(...below) : -1;
					})
				);
				expect([...columnCounts(lower, parent)]).toEqual(columns.map((rows) => rows.size));
			})
		);
	});

	it('every entry of the factor has a place in its panel, every row one in the parent', () => {
		fc.assert(
			fc.property(graphs, fc.boolean(), (graph, hasPlaces) => {
				const matrix = assemble(graph);
				const symbolic = analyse(
					matrix,
					hasPlaces ? orderNestedDissection(matrix, graph.x, graph.y) : orderMinimumDegree(matrix)
				);
				const { perm, supernodes, start, rowStart, rows, relative, parent } = symbolic;
				expect([...perm].sort((a, b) => a - b)).toEqual([...upTo(graph.n)]);
				const columns = eliminateNaively(permutedLower(matrix, perm, invert(perm)));
				for (let s = 0; s < supernodes; s++) {
					const panelRows = rows.subarray(rowStart[s], rowStart[s + 1]);
					expect([...panelRows]).toEqual([...new Set(panelRows)].sort((a, b) => a - b));
					const width = start[s + 1] - start[s];
					expect([...panelRows.subarray(0, width)]).toEqual(
						Array.from({ length: width }, (_, k) => start[s] + k)
					);
					const held = new Set(panelRows);
					for (let j = start[s]; j < start[s + 1]; j++) {
						for (const i of columns[j]) expect(held.has(i)).toBe(true);
					}
					if (parent[s] === -1) expect(panelRows.length).toBe(width);
					for (let p = rowStart[s] + width; p < rowStart[s + 1]; p++) {
						expect(rows[rowStart[parent[s]] + relative[p]]).toBe(rows[p]);
					}
				}
			})
		);
	});

	it('refuses an order that is not a permutation', () => {
		const matrix = assemble(lattice(2, 2));
		expect(() => groupColumns(matrix, Int32Array.of(0, 1, 1, 3))).toThrow(/order\[2\] = 1/);
		expect(() => groupColumns(matrix, Int32Array.of(0, 1, 2))).toThrow(/an order of 3 for 4 rows/);
	});
});
