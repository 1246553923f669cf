/** Weighted graphs and their matrices, for tests of the sparse solver. */
import fc from 'fast-check';
import { Matrix } from 'ml-matrix';
import {
	analyse,
	assembleLaplacian,
	factorise,
	groupColumns,
	norm2,
	planAssembly,
	relativeResidual,
	type CholeskyFactor,
	type EliminationOrder,
	type SymmetricMatrix
} from '#lib/sparse/index.ts';

export interface Graph {
	n: number;
	from: number[];
	to: number[];
	conductance: number[];
	tie: number[];
	x: number[];
	y: number[];
}

export function assemble(graph: Graph): SymmetricMatrix {
	const plan = planAssembly(graph.n, Int32Array.from(graph.from), Int32Array.from(graph.to));
	return assembleLaplacian(
		plan,
		Float64Array.from(graph.conductance),
		Float64Array.from(graph.tie)
	);
}

export function dense({ n, rowStart, column, value }: SymmetricMatrix): Matrix {
	const full = Matrix.zeros(n, n);
	for (let i = 0; i < n; i++) {
		for (let p = rowStart[i]; p < rowStart[i + 1]; p++) full.set(i, column[p], value[p]);
	}
	return full;
}

/** 0 .. n - 1. */
export function upTo(n: number): Int32Array {
	return Int32Array.from({ length: n }, (_, i) => i);
}

/** The order in which the rows stand. */
export function naturalOrder(matrix: SymmetricMatrix): EliminationOrder {
	return groupColumns(matrix, upTo(matrix.n));
}

export function factorOf(matrix: SymmetricMatrix, order: EliminationOrder): CholeskyFactor {
	const result = factorise(analyse(matrix, order), matrix);
	if (result.status !== 'factorised') throw new Error(result.status);
	return result.factor;
}

/** The values of a factor's panels. */
export function panelsOf({ symbolic, space }: CholeskyFactor): Float64Array {
	return new Float64Array(space.memory.buffer, space.layout.panels, symbolic.panelValues).slice();
}

/** A lattice tied at its first node; edges are numbered node by node, right before up. */
export function lattice(columns: number, rows: number, conductance = (_edge: number) => 1): Graph {
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

/** The graphs side by side, nothing between them. */
export function besideEachOther(...parts: readonly Graph[]): Graph {
	const all: Graph = { n: 0, from: [], to: [], conductance: [], tie: [], x: [], y: [] };
	for (const part of parts) {
		const left = Math.max(-1, ...all.x) + 1;
		all.from.push(...part.from.map((i) => i + all.n));
		all.to.push(...part.to.map((i) => i + all.n));
		all.conductance.push(...part.conductance);
		all.tie.push(...part.tie);
		all.x.push(...part.x.map((x) => x + left));
		all.y.push(...part.y);
		all.n += part.n;
	}
	return all;
}

/** A hub with `rays` neighbours of conductance 1, 2, ..., tied at the hub. */
export function star(rays: number): Graph {
	const columns = Math.ceil(Math.sqrt(rays + 1));
	return {
		n: rays + 1,
		from: Array.from({ length: rays }, () => 0),
		to: Array.from({ length: rays }, (_, i) => i + 1),
		conductance: Array.from({ length: rays }, (_, i) => 1 + i),
		tie: [1, ...Array.from({ length: rays }, () => 0)],
		x: Array.from({ length: rays + 1 }, (_, i) => i % columns),
		y: Array.from({ length: rays + 1 }, (_, i) => Math.floor(i / columns))
	};
}

/** Random graphs with parallel edges, unconnected parts, coinciding places and every node tied. */
export const graphs: fc.Arbitrary<Graph> = fc
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
export function backwardError(matrix: SymmetricMatrix, x: Float64Array, b: Float64Array): number {
	const largest = matrix.value.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
	const size = largest * norm2(x) + norm2(b);
	return (relativeResidual(matrix, x, b) * norm2(b)) / size;
}
