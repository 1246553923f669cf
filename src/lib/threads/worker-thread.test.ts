import { afterAll, describe, expect, it } from 'vitest';
import {
	analyse,
	factorise,
	orderNestedDissection,
	relativeResidual,
	solveWith,
	type SecondThread
} from '#lib/sparse/index.ts';
import { assemble, lattice, panelsOf, star } from '../../../tests/support/graphs.ts';
import { WorkerThread } from './index.ts';

const thread = new WorkerThread();
afterAll(() => thread.stop());

/** A thread that never takes a task. */
const absent: SecondThread = { start: () => undefined, finish: () => null };

describe('a second thread', () => {
	it.each([
		['a lattice', lattice(70, 60, (e) => 1 + (e % 5))],
		['a long lattice', lattice(300, 4)],
		['a star', star(200)],
		['one node', lattice(1, 1)]
	])('gives the factor and the answer of one thread: %s', (_name, graph) => {
		const matrix = assemble(graph);
		const symbolic = analyse(matrix, orderNestedDissection(matrix, graph.x, graph.y));
		const b = Float64Array.from({ length: graph.n }, (_, i) => Math.sin(i));
		const alone = factorise(symbolic, matrix);
		if (alone.status !== 'factorised') throw new Error(alone.status);
		for (const secondThread of [thread, absent]) {
			const together = factorise(symbolic, matrix, { secondThread });
			if (together.status !== 'factorised') throw new Error(together.status);
			expect(panelsOf(together.factor)).toEqual(panelsOf(alone.factor));
			const x = solveWith(together.factor, b);
			expect(relativeResidual(matrix, x, b)).toBeLessThan(1e-12);
			expect(solveWith(together.factor, b)).toEqual(x);
		}
	});

	it('names a pivot that is not positive, on whichever thread it is', () => {
		const graph = lattice(40, 40);
		const matrix = assemble({ ...graph, tie: graph.tie.map(() => 1) });
		const symbolic = analyse(matrix, orderNestedDissection(matrix, graph.x, graph.y));
		for (const row of [0, 39, 1560, 1599]) {
			const value = matrix.value.slice();
			for (let p = matrix.rowStart[row]; p < matrix.rowStart[row + 1]; p++) {
				if (matrix.column[p] === row) value[p] = -1;
			}
			expect(factorise(symbolic, { ...matrix, value }, { secondThread: thread })).toEqual({
				status: 'not-positive-definite',
				row
			});
		}
	});
});
