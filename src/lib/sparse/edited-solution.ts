import { LuDecomposition, Matrix } from 'ml-matrix';
import type { CholeskyFactor } from './factorise.ts';
import type { Ports } from './ports.ts';
import { solveRelated } from './solve-block.ts';
import { backwardWith, forwardWith } from './solve.ts';

/** A change of conductance from one place to the reference: adds siemens * e e^T to the matrix. */
export interface ConductanceEdit {
	/** e: ports and their weights. A place between two nodes has two. */
	readonly place: readonly (readonly [port: number, weight: number])[];
	/** Positive for what is added, negative for what is taken away. */
	readonly siemens: number;
}

/** The solution of an edited system. */
export interface EditedSolution {
	/** The answer at a port. */
	at(port: number): number;
	/** The whole answer by rows of the matrix: one backward substitution. Length n. */
	all(): Float64Array;
}

/** Smallest pivot of the scaled equations of the edits: fewer digits than this leaves are too few. */
const LEAST_PIVOT = 1e-9;

/** A solution that is kept so that small edits of its matrix are answered without a new factor. */
export interface EditableSolution {
	/** The answer of the matrix as it was factored, by rows. Length n. */
	readonly solution: Float64Array;
	/**
	 * The answer after the edits, all of them counted from the factored matrix; null where they leave
	 * it singular, or so nearly that too many digits are lost: factor it anew.
	 */
	edited(edits: readonly ConductanceEdit[]): EditedSolution | null;
	/**
	 * The whole answers of many cases of edits, some at a time through the factor. Each is handed to
	 * `answer` in a buffer that the next one overwrites; a case that is singular is left out.
	 */
	eachEdited(
		cases: readonly (readonly ConductanceEdit[])[],
		answer: (index: number, x: Float64Array) => void
	): void;
	/**
	 * The whole answers of the factored matrix with more currents at the ports, in the same way.
	 *
	 * @param currents of case `index`, one per port, A; may be one buffer for all
	 */
	eachInjected(
		count: number,
		currents: (index: number) => Float64Array,
		answer: (index: number, x: Float64Array) => void
	): void;
}

/**
 * Solves A x = b and (A + E D E^T) x' = b for edits E D E^T of a few ports (M. A. Woodbury, Inverting
 * modified matrices, Statistical Research Group Memo 42, Princeton 1950; W. W. Hager, SIAM Review 31
 * (1989) 221): x' = x - A^-1 E c with (D^-1 + E^T A^-1 E) c = E^T x. The forward half of x is kept,
 * so that all of x' costs a backward substitution.
 *
 * @param ports of the factor; all places of edits are among them
 */
export function createEditableSolution(
	factor: CholeskyFactor,
	ports: Ports,
	b: Float64Array
): EditableSolution {
	const forward = forwardWith(factor, b);
	const solution = backwardWith(factor, forward);

	/** What the edits take out at the ports, as sources there; null where they are singular. */
	function sourcesOf(edits: readonly ConductanceEdit[]): readonly Source[] | null {
		const active = edits.filter(({ siemens }) => siemens !== 0);
		if (active.length === 0) return [];
		const currents = editCurrents(active, ports, solution);
		return (
			currents &&
			active.flatMap(({ place }, e) =>
				place.map(([port, weight]) => ({ port, amps: -weight * currents[e] }))
			)
		);
	}

	return {
		solution,
		edited(edits) {
			const sources = sourcesOf(edits);
			if (sources === null) return null;
			return {
				at: (port) =>
					sources.reduce(
						(sum, source) => sum + ports.at(port, source.port) * source.amps,
						solution[ports.rows[port]]
					),
				all() {
					const half = forward.slice();
					for (const { port, amps } of sources) ports.addTo(half, port, amps);
					return backwardWith(factor, half);
				}
			};
		},
		eachEdited(cases, answer) {
			const solvable = cases.flatMap((edits, index) => {
				const sources = sourcesOf(edits);
				return sources === null ? [] : [{ index, sources }];
			});
			solveRelated(factor, {
				count: solvable.length,
				common: forward,
				isForwardDone: true,
				change(k, y, lanes, lane) {
					for (const { port, amps } of solvable[k].sources) {
						ports.addTo(y, port, amps, lanes, lane);
					}
				},
				answer: (k, x) => answer(solvable[k].index, x)
			});
		},
		eachInjected(count, currents, answer) {
			// Every port has a current: the ways of all of them are longer than the whole factor.
			const { perm, iperm } = factor.symbolic;
			solveRelated(factor, {
				count,
				common: Float64Array.from(perm, (row) => b[row]),
				isForwardDone: false,
				change(index, y, lanes, lane) {
					currents(index).forEach(
						(amps, port) => (y[iperm[ports.rows[port]] * lanes + lane] += amps)
					);
				},
				answer
			});
		}
	};
}

interface Source {
	readonly port: number;
	readonly amps: number;
}

/** c of `createEditableSolution`: what each edit takes out of its place. */
function editCurrents(
	edits: readonly ConductanceEdit[],
	ports: Ports,
	solution: Float64Array
): number[] | null {
	const between = (row: ConductanceEdit, column: ConductanceEdit) => {
		let sum = 0;
		for (const [a, weightA] of row.place) {
			for (const [b, weightB] of column.place) sum += weightA * weightB * ports.at(a, b);
		}
		return sum;
	};
	// Scaled so that what the diagonal is the sum of is of size 1: pivots tell what cancelled.
	const scale = edits.map(
		(edit) => 1 / Math.sqrt(Math.abs(1 / edit.siemens) + between(edit, edit))
	);
	const small = new Matrix(
		edits.map((row, e) =>
			edits.map(
				(column, f) =>
					scale[e] * scale[f] * ((e === f ? 1 / row.siemens : 0) + between(row, column))
			)
		)
	);
	const right = edits.map(
		({ place }, e) =>
			scale[e] * place.reduce((sum, [port, weight]) => sum + weight * solution[ports.rows[port]], 0)
	);
	const lu = new LuDecomposition(small);
	const pivots = lu.upperTriangularMatrix.diagonal().map(Math.abs);
	if (Math.min(...pivots) < LEAST_PIVOT) return null;
	const scaled = lu.solve(Matrix.columnVector(right)).to1DArray();
	return scaled.map((value, e) => value * scale[e]);
}
