import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { assemble, backwardError, factorOf, lattice } from '../../../tests/support/graphs.ts';
import {
	createEditableSolution,
	createPorts,
	orderNestedDissection,
	type ConductanceEdit,
	type SymmetricMatrix
} from './index.ts';

const graph = lattice(23, 17, (e) => 1 + (e % 4));
graph.tie = graph.tie.map((_, i) => (i % 11 === 0 ? 2 : 0));
const matrix = assemble(graph);
const factor = factorOf(matrix, orderNestedDissection(matrix, graph.x, graph.y));
const b = Float64Array.from({ length: graph.n }, (_, i) => Math.sin(i));

/** The matrix with edits at single rows, added to its diagonal. */
function withTies(edits: ReadonlyMap<number, number>): SymmetricMatrix {
	return assemble({ ...graph, tie: graph.tie.map((tie, i) => tie + (edits.get(i) ?? 0)) });
}

describe('an edited solution', () => {
	it('solves the edited matrix: ties removed, added and moved', () => {
		fc.assert(
			fc.property(
				fc.uniqueArray(fc.nat(graph.n - 1), { minLength: 2, maxLength: 40 }),
				fc.boolean(),
				(rows, isMoved) => {
					const ports = createPorts(factor, rows);
					const change = rows.map((row, k) =>
						graph.tie[row] > 0 && isMoved ? -graph.tie[row] : 0.5 + (k % 3)
					);
					const edits = rows.map((_, port): ConductanceEdit => ({
						place: [[port, 1]],
						siemens: change[port]
					}));
					const answer = createEditableSolution(factor, ports, b).edited(edits);
					if (answer === null) throw new Error('singular');
					const x = answer.all();
					const edited = withTies(new Map(rows.map((row, k) => [row, change[k]])));
					expect(backwardError(edited, x, b)).toBeLessThan(1e-13);
					const scale = Math.max(...x.map(Math.abs));
					rows.forEach((row, port) =>
						expect(Math.abs(answer.at(port) - x[row])).toBeLessThan(1e-12 * scale)
					);
				}
			)
		);
	});

	it('answers many cases at once as each alone', () => {
		const rows = Array.from({ length: 21 }, (_, k) => 11 * k);
		const ports = createPorts(factor, rows);
		const editable = createEditableSolution(factor, ports, b);
		const cases = rows.map((_, port): ConductanceEdit[] => [{ place: [[port, 1]], siemens: -2 }]);
		const seen: number[] = [];
		editable.eachEdited(cases, (index, x) => {
			seen.push(index);
			const alone = editable.edited(cases[index])?.all();
			alone?.forEach((value, i) => expect(x[i]).toBeCloseTo(value, 12));
		});
		expect(seen).toEqual(rows.map((_, k) => k));
	});

	it('adds currents at the ports', () => {
		const rows = [3, 3, 250];
		const editable = createEditableSolution(factor, createPorts(factor, rows), b);
		editable.eachInjected(
			11,
			(index) => Float64Array.of(index, 2, -0.5 * index),
			(index, x) => {
				const injected = b.slice();
				injected[3] += index + 2;
				injected[250] -= 0.5 * index;
				expect(backwardError(matrix, x, injected)).toBeLessThan(1e-14);
			}
		);
	});

	it('follows a port that moves', () => {
		const ports = createPorts(factor, [40, 200, 200]);
		ports.all();
		for (const row of [7, graph.n - 1, 123]) {
			ports.move(2, row);
			const edits: ConductanceEdit[] = [
				{ place: [[0, 1]], siemens: 1 },
				{ place: [[2, 1]], siemens: 4 }
			];
			const x = createEditableSolution(factor, ports, b).edited(edits)?.all();
			const edited = withTies(
				new Map([
					[40, 1],
					[row, 4]
				])
			);
			expect(backwardError(edited, x ?? b, b)).toBeLessThan(1e-13);
		}
	});

	it('takes a place between two nodes by its weights', () => {
		const rows = [40, 41];
		const siemens = 3;
		const answer = createEditableSolution(factor, createPorts(factor, rows), b).edited([
			{
				place: [
					[0, 0.25],
					[1, 0.75]
				],
				siemens
			}
		]);
		if (answer === null) throw new Error('singular');
		// The same edit, entry by entry of the matrix.
		const edited = { ...matrix, value: matrix.value.slice() };
		const weight = new Map([
			[40, 0.25],
			[41, 0.75]
		]);
		for (const i of rows) {
			for (let p = matrix.rowStart[i]; p < matrix.rowStart[i + 1]; p++) {
				const other = weight.get(matrix.column[p]);
				if (other !== undefined) edited.value[p] += siemens * (weight.get(i) ?? 0) * other;
			}
		}
		expect(backwardError(edited, answer.all(), b)).toBeLessThan(1e-13);
	});

	it('without edits is the solution itself, and a singular edit is told', () => {
		const only = lattice(6, 5);
		const small = assemble(only);
		const kept = factorOf(small, orderNestedDissection(small, only.x, only.y));
		const right = new Float64Array(30).fill(1);
		const editable = createEditableSolution(kept, createPorts(kept, [0]), right);
		expect(editable.edited([])?.all()).toEqual(editable.solution);
		// The lattice is tied at its first node alone: without that tie it floats.
		expect(editable.edited([{ place: [[0, 1]], siemens: -1 }])).toBeNull();
	});
});
