import type { SymbolicFactor } from './analyse.ts';
import { factorisePanel, subtractProduct } from './kernels.ts';
import type { SymmetricMatrix } from './matrix.ts';

/** A = P^T L L^T P. */
export interface CholeskyFactor {
	readonly symbolic: SymbolicFactor;
	/** Panels of L, row-major, at `symbolic.panelStart`. Length `symbolic.panelValues`. */
	readonly panels: Float64Array;
}

export type FactoriseResult =
	| { readonly status: 'factorised'; readonly factor: CholeskyFactor }
	/**
	 * The matrix is not positive definite: the pivot of this row was zero, negative or no number.
	 * Rounding may leave a tiny positive pivot where a part of a graph has no tie at all, so a
	 * caller that allows such parts looks for them in the graph.
	 */
	| { readonly status: 'not-positive-definite'; readonly row: number }
	/** The factor would not fit; nothing was allocated. */
	| { readonly status: 'too-large'; readonly bytes: number; readonly limitBytes: number };

const BYTES_PER_VALUE = 8;
/** Offsets into panels and stack are int32, so neither may hold more values. */
const MOST_VALUES = 2 ** 31 - 1;

/** Memory that a factor and its making take, bytes. */
export function factorBytes(symbolic: SymbolicFactor): number {
	const { panelValues, stackValues, largestBelow } = symbolic;
	return BYTES_PER_VALUE * (panelValues + stackValues + largestBelow ** 2);
}

/**
 * Numeric multifrontal factorisation of a matrix with the analysed pattern. Each front is a panel
 * (the columns eliminated in it) and an update matrix for its parent; updates wait on a stack, which
 * works because children come before parents in postorder.
 *
 * @param matrix of the pattern that was analysed; else a RangeError
 * @param limitBytes most memory that factor and working space may take together
 */
export function factorise(
	symbolic: SymbolicFactor,
	matrix: SymmetricMatrix,
	limitBytes = Infinity
): FactoriseResult {
	const { length } = matrix.value;
	if (matrix.n !== symbolic.n || length !== symbolic.storedEntries) {
		throw new RangeError(
			`a matrix of ${matrix.n} rows and ${length} entries, analysed were ${symbolic.n} and ${symbolic.storedEntries}`
		);
	}
	const bytes = factorBytes(symbolic);
	if (bytes > limitBytes) return { status: 'too-large', bytes, limitBytes };
	if (Math.max(symbolic.panelValues, symbolic.stackValues) > MOST_VALUES) {
		return { status: 'too-large', bytes, limitBytes: MOST_VALUES * BYTES_PER_VALUE };
	}
	const { supernodes, start, rowStart, panelStart, parent, entryStart, entryFrom, entryTo } =
		symbolic;
	const panels = new Float64Array(symbolic.panelValues);
	const stack = new Float64Array(symbolic.stackValues);
	const update = new Float64Array(symbolic.largestBelow ** 2);
	const firstChild = new Int32Array(supernodes).fill(-1);
	const nextSibling = new Int32Array(supernodes).fill(-1);
	/** Where each waiting update starts on the stack. */
	const stackStart = new Int32Array(supernodes);
	let top = 0;
	for (let s = 0; s < supernodes; s++) {
		const width = start[s + 1] - start[s];
		const height = rowStart[s + 1] - rowStart[s];
		const below = height - width;
		const panel = panelStart[s] | 0;
		for (let p = entryStart[s]; p < entryStart[s + 1]; p++) {
			panels[panel + entryTo[p]] = matrix.value[entryFrom[p]];
		}
		update.fill(0, 0, below * below);
		for (let child = firstChild[s]; child !== -1; child = nextSibling[child]) {
			top = stackStart[child];
			addChildUpdate(symbolic, child, stack, top, panels, panel, width, update, below);
		}
		const failed = factorisePanel(panels, panel, width, height);
		if (failed !== -1) {
			return { status: 'not-positive-definite', row: symbolic.perm[start[s] + failed] };
		}
		if (below === 0) continue;
		const belowPanel = panel + width * width;
		subtractProduct(update, 0, below, panels, belowPanel, width, below, below, width);
		stackStart[s] = top;
		stack.set(update.subarray(0, below * below), top);
		top += below * below;
		// Last child first: that is the order in which the stack is emptied.
		nextSibling[s] = firstChild[parent[s]];
		firstChild[parent[s]] = s;
	}
	return { status: 'factorised', factor: { symbolic, panels } };
}

/** Adds a child's update matrix into its parent's panel and update matrix. */
function addChildUpdate(
	{ start, rowStart, relative }: SymbolicFactor,
	child: number,
	stack: Float64Array,
	source: number,
	panels: Float64Array,
	panel: number,
	width: number,
	update: Float64Array,
	below: number
): void {
	const first = rowStart[child] + start[child + 1] - start[child];
	const size = rowStart[child + 1] - first;
	for (let i = 0; i < size; i++) {
		const row = relative[first + i];
		const from = source + i * size;
		if (row < width) {
			const to = panel + row * width;
			for (let j = 0; j <= i; j++) panels[to + relative[first + j]] += stack[from + j];
			continue;
		}
		const toPanel = panel + row * width;
		const toUpdate = (row - width) * below - width;
		for (let j = 0; j <= i; j++) {
			const column = relative[first + j];
			if (column < width) panels[toPanel + column] += stack[from + j];
			else update[toUpdate + column] += stack[from + j];
		}
	}
}
