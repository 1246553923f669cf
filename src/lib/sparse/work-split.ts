import type { SymbolicFactor } from './analyse.ts';

/** Runs of supernodes, [from, to) pairs one after another, in the order in which they are factored. */
export type Ranges = readonly number[];

/**
 * How two threads share a factorisation: whole subtrees of the elimination tree each, which touch
 * nothing of each other's, and what is above them for one thread afterwards.
 */
export interface WorkSplit {
	readonly own: Ranges;
	readonly other: Ranges;
	readonly top: Ranges;
}

/** A subtree is cut further while the threads' loads differ by more than this share of all work. */
const UNEVEN_SHARE = 0.03;
/** Subtrees of less than this share of all work are left whole. */
const LEAST_SHARE = 0.005;

/** Multiplications and additions of each supernode's elimination. Length supernodes. */
export function eliminationWork({ supernodes, start, rowStart }: SymbolicFactor): Float64Array {
	const work = new Float64Array(supernodes);
	for (let s = 0; s < supernodes; s++) {
		const width = start[s + 1] - start[s];
		const height = rowStart[s + 1] - rowStart[s];
		// Column j updates a square of height - j rows: the sum over j of its entries.
		const above = height - width;
		work[s] = (height * (height + 1) * (2 * height + 1)) / 6;
		work[s] -= (above * (above + 1) * (2 * above + 1)) / 6;
	}
	return work;
}

/** Shares a factorisation out: the largest subtrees are opened until both loads are about even. */
export function splitWork(symbolic: SymbolicFactor): WorkSplit {
	const { supernodes, parent } = symbolic;
	const work = eliminationWork(symbolic);
	/** Work of the whole subtree below and with each supernode, and its first supernode. */
	const subtree = work.slice();
	const first = Int32Array.from({ length: supernodes }, (_, s) => s);
	for (let s = 0; s < supernodes; s++) {
		if (parent[s] === -1) continue;
		subtree[parent[s]] += subtree[s];
		first[parent[s]] = Math.min(first[parent[s]], first[s]);
	}
	const children = (root: number) => {
		const found: number[] = [];
		// The last child is right before its parent, the one before it right before its subtree.
		for (let s = root - 1; s >= first[root]; s = first[s] - 1) found.push(s);
		return found;
	};
	let total = 0;
	let trees: number[] = [];
	for (let s = 0; s < supernodes; s++) {
		if (parent[s] !== -1) continue;
		trees.push(s);
		total += subtree[s];
	}
	const top: number[] = [];
	let shares = shareOut(trees, subtree);
	while (Math.abs(shares.load[0] - shares.load[1]) > UNEVEN_SHARE * total) {
		const largest = trees.reduce((most, s) => (subtree[s] > subtree[most] ? s : most));
		if (subtree[largest] < LEAST_SHARE * total) break;
		top.push(largest);
		trees = [...trees.filter((s) => s !== largest), ...children(largest)];
		if (trees.length === 0) break;
		shares = shareOut(trees, subtree);
	}
	const rangesOf = (roots: readonly number[]) =>
		[...roots].sort((a, b) => a - b).flatMap((s) => [first[s], s + 1]);
	return {
		own: rangesOf(shares.trees[0]),
		other: rangesOf(shares.trees[1]),
		top: top.sort((a, b) => a - b).flatMap((s) => [s, s + 1])
	};
}

/** The largest subtree first, each to the thread with less (R. L. Graham, SIAM J. Appl. Math. 17 (1969) 416). */
function shareOut(trees: readonly number[], subtree: Float64Array) {
	const shares = { trees: [[], []] as [number[], number[]], load: [0, 0] as [number, number] };
	for (const s of [...trees].sort((a, b) => subtree[b] - subtree[a] || a - b)) {
		const to = shares.load[0] <= shares.load[1] ? 0 : 1;
		shares.trees[to].push(s);
		shares.load[to] += subtree[s];
	}
	return shares;
}
