import fc from 'fast-check';
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
	columnCounts,
	eliminationTree,
	permutedLower,
	postorder,
	type LowerPattern
} from './elimination-tree.ts';
import {
	analyse,
	assembleLaplacian,
	factorBytes,
	factorise,
	levelCoordinates,
	norm2,
	orderNestedDissection,
	planAssembly,
	relativeResidual,
	solveWith,
	type SymmetricMatrix
} from './index.ts';

interface Graph {
	n: number;
	from: number[];
	to: number[];
	conductance: number[];
	tie: number[];
	x: number[];
	y: number[];
}

function assemble(graph: Graph): SymmetricMatrix {
	const plan = planAssembly(graph.n, Int32Array.from(graph.from), Int32Array.from(graph.to));
	return assembleLaplacian(
		plan,
		Float64Array.from(graph.conductance),
		Float64Array.from(graph.tie)
	);
}

function dense({ n, rowStart, column, value }: SymmetricMatrix): Matrix {
	const full = Matrix.zeros(n, n);
	for (let i = 0; i < n; i++) {
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) full.set(i, column[p], value[p]);
	}
	return full;
}

function solveDirect(matrix: SymmetricMatrix, order: Int32Array, b: Float64Array): Float64Array {
	const result = factorise(analyse(matrix, order), matrix);
	if (result.status !== 'factorised') throw new Error(result.status);
	return solveWith(result.factor, b);
}

function lattice(columns: number, rows: number, conductance = (_edge: number) => 1): Graph {
	const graph: Graph = {
		n: columns * rows,
		from: [],
		to: [],
		conductance: [],
		tie: [],
		x: [],
		y: []
	};
	for (let j = 0; j < rows; j++) {
		for (let i = 0; i < columns; i++) {
			const k = j * columns + i;
			graph.x.push(i);
			graph.y.push(j);
			graph.tie.push(k === 0 ? 1 : 0);
			for (const [isThere, other] of [
				[i + 1 < columns, k + 1],
				[j + 1 < rows, k + columns]
			] as const) {
				if (!isThere) continue;
				graph.from.push(k);
				graph.to.push(other);
				graph.conductance.push(conductance(graph.conductance.length));
			}
		}
	}
	return graph;
}

/** Random graphs with parallel edges, unconnected parts and scattered coordinates. */
const graphs: fc.Arbitrary<Graph> = fc
	.record({
		n: fc.integer({ min: 1, max: 60 }),
		edges: fc.array(fc.tuple(fc.nat(), fc.nat(), fc.double({ min: 1e-3, max: 1e3, noNaN: true })), {
			maxLength: 150
		}),
		places: fc.array(fc.tuple(fc.nat(9), fc.nat(9)), { minLength: 60, maxLength: 60 })
	})
	.map(({ n, edges, places }) => {
		const graph: Graph = { n, from: [], to: [], conductance: [], tie: [], x: [], y: [] };
		for (const [a, b, g] of edges) {
			if (a % n === b % n) continue;
			graph.from.push(a % n);
			graph.to.push(b % n);
			graph.conductance.push(g);
		}
		for (let i = 0; i < n; i++) {
			graph.tie.push(0.01 + (i % 7));
			graph.x.push(places[i][0]);
			graph.y.push(places[i][1]);
		}
		return graph;
	});

/** Residual against the sizes of matrix, solution and right-hand side: the rounding of a stable method. */
function backwardError(matrix: SymmetricMatrix, x: Float64Array, b: Float64Array): number {
	const largest = matrix.value.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
	const size = largest * norm2(x) + norm2(b);
	return (relativeResidual(matrix, x, b) * norm2(b)) / size;
}

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

	it('refuses an edge that leaves the nodes or returns to its own', () => {
		expect(() => planAssembly(2, Int32Array.of(0), Int32Array.of(2))).toThrow(
			/edge 0 joins 0 and 2/
		);
		expect(() => planAssembly(2, Int32Array.of(1), Int32Array.of(1))).toThrow(RangeError);
	});
});

describe('orders', () => {
	it('nested dissection is a permutation, whatever the coordinates', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				const order = orderNestedDissection(assemble(graph), graph.x, graph.y);
				expect([...order].sort((a, b) => a - b)).toEqual([...order.keys()]);
			})
		);
	});

	it('the fill of a lattice grows like n log n, not like n^1.5', () => {
		const entriesPerNode = [32, 64, 128].map((side) => {
			const graph = lattice(side, side);
			const matrix = assemble(graph);
			return analyse(matrix, orderNestedDissection(matrix, graph.x, graph.y)).panelValues / graph.n;
		});
		// Doubling the side adds a constant to n log n; a band order would double it.
		expect(entriesPerNode[1] / entriesPerNode[0]).toBeLessThan(1.45);
		expect(entriesPerNode[2] / entriesPerNode[1]).toBeLessThan(1.35);
	});
});

/** Structure of L by eliminating column after column: slow, but without any theory. */
function eliminateNaively(lower: LowerPattern): { parent: number[]; counts: number[] } {
	const columns = Array.from({ length: lower.n }, (_, j) => new Set([j]));
	for (let i = 0; i < lower.n; i++) {
		for (let p = lower.rowStart[i]; p < lower.rowStart[i + 1]; p++) columns[lower.column[p]].add(i);
	}
	const parent = columns.map((rows, j) => {
		const below = [...rows].filter((i) => i > j);
		for (const i of below) for (const k of below) if (k >= i) columns[i].add(k);
		return below.length > 0 ? Math.min(...below) : -1;
	});
	return { parent, counts: columns.map((rows) => rows.size) };
}

describe('symbolic analysis', () => {
	it('tree and column counts agree with elimination by hand', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				const matrix = assemble(graph);
				const natural = Int32Array.from({ length: graph.n }, (_, i) => i);
				const post = postorder(eliminationTree(permutedLower(matrix, natural, natural)));
				const inverse = new Int32Array(graph.n);
				post.forEach((old, k) => (inverse[old] = k));
				const lower = permutedLower(matrix, post, inverse);
				const parent = eliminationTree(lower);
				const naive = eliminateNaively(lower);
				expect([...parent]).toEqual(naive.parent);
				expect([...columnCounts(lower, parent)]).toEqual(naive.counts);
			})
		);
	});

	it('refuses an order that is not a permutation', () => {
		const matrix = assemble(lattice(2, 2));
		expect(() => analyse(matrix, Int32Array.of(0, 1, 1, 3))).toThrow(/order\[2\] = 1/);
	});
});

describe('factorisation and solution', () => {
	it('agrees with a dense Cholesky of a general package on random graphs', () => {
		fc.assert(
			fc.property(graphs, (graph) => {
				const matrix = assemble(graph);
				const b = Float64Array.from({ length: graph.n }, (_, i) => Math.cos(3 * i));
				const expected = new CholeskyDecomposition(dense(matrix)).solve(Matrix.columnVector(b));
				const x = solveDirect(matrix, orderNestedDissection(matrix, graph.x, graph.y), b);
				const scale = Math.max(...expected.getColumn(0).map(Math.abs));
				x.forEach((value, i) =>
					expect(Math.abs(value - expected.get(i, 0))).toBeLessThan(1e-10 * scale)
				);
			})
		);
	});

	it.each<[string, Graph]>([
		['one node', lattice(1, 1)],
		['two nodes', lattice(2, 1)],
		['a chain', lattice(400, 1)],
		['a long lattice', lattice(150, 7)],
		['a conductance contrast of 1e6', lattice(60, 60, (e) => (e % 3 === 0 ? 1e6 : 1))],
		[
			'a star',
			{
				n: 301,
				from: Array.from({ length: 300 }, () => 0),
				to: Array.from({ length: 300 }, (_, i) => i + 1),
				conductance: Array.from({ length: 300 }, (_, i) => 1 + i),
				tie: [1, ...Array.from({ length: 300 }, () => 0)],
				x: Array.from({ length: 301 }, (_, i) => i % 20),
				y: Array.from({ length: 301 }, (_, i) => Math.floor(i / 20))
			}
		],
		[
			'isolated nodes beside a pair',
			{
				n: 4,
				from: [1],
				to: [2],
				conductance: [2],
				tie: [1, 1, 1, 1],
				x: [0, 1, 2, 3],
				y: [0, 0, 0, 0]
			}
		]
	])('%s is solved to rounding', (_name, graph) => {
		const matrix = assemble(graph);
		const b = Float64Array.from({ length: graph.n }, (_, i) => Math.sin(i + 1));
		for (const { x, y } of [graph, levelCoordinates(matrix)]) {
			const solution = solveDirect(matrix, orderNestedDissection(matrix, x, y), b);
			expect(backwardError(matrix, solution, b)).toBeLessThan(1e-14);
		}
	});

	it('finds again the solution that the right-hand side was made from', () => {
		const graph = lattice(40, 30, (e) => 1 + (e % 5));
		const matrix = assemble(graph);
		const known = Float64Array.from({ length: graph.n }, (_, i) => 1 + Math.sin(i) / 3);
		const b = new Float64Array(graph.n);
		for (let i = 0; i < graph.n; i++) {
			for (let p = matrix.rowStart[i]; p < matrix.rowStart[i + 1]; p++) {
				b[i] += matrix.value[p] * known[matrix.column[p]];
			}
		}
		const x = solveDirect(matrix, orderNestedDissection(matrix, graph.x, graph.y), b);
		x.forEach((value, i) => expect(value).toBeCloseTo(known[i], 9));
	});

	it('reports the row whose pivot is not positive', () => {
		const floating = { ...lattice(3, 1), tie: [0, 0, 0] };
		const matrix = assemble(floating);
		const result = factorise(analyse(matrix, Int32Array.of(0, 1, 2)), matrix);
		expect(result).toEqual({ status: 'not-positive-definite', row: 2 });
	});

	it('refuses a factor beyond the limit with both sizes', () => {
		const matrix = assemble(lattice(30, 30));
		const symbolic = analyse(
			matrix,
			Int32Array.from({ length: 900 }, (_, i) => i)
		);
		expect(factorise(symbolic, matrix, 1000)).toEqual({
			status: 'too-large',
			bytes: factorBytes(symbolic),
			limitBytes: 1000
		});
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
	});
});
