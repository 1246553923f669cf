import type { SymbolicFactor } from './analyse.ts';
import {
	bindKernels,
	growMemory,
	KERNEL_SIZES,
	planSpace,
	type KernelCall,
	type Kernels
} from './kernels.ts';
import { giveBackMemory, takeMemory } from './memory-pool.ts';
import type { Ranges, WorkSplit } from './work-split.ts';

/** Stacks of update matrices of one thread, values. */
interface StackNeeds {
	even: number;
	odd: number;
}

/** Where a thread works: byte pointers. */
export interface ThreadSpace {
	readonly even: number;
	readonly odd: number;
	readonly scratch: number;
}

export interface SharedSpace {
	/** Of the second thread. */
	readonly other: ThreadSpace;
	/** Of the calling thread, for what comes after both. */
	readonly top: ThreadSpace;
	/** The second thread's unknowns, n doubles. */
	readonly otherY: number;
}

/** Where everything of a factor lies in its memory: byte pointers. */
export interface FactorLayout {
	readonly bytes: number;
	/** int32, as in `SymbolicFactor`. */
	readonly start: number;
	readonly rowStart: number;
	readonly rows: number;
	readonly relative: number;
	readonly parent: number;
	readonly entryStart: number;
	readonly entryFrom: number;
	readonly entryTo: number;
	/** 1 for a supernode of odd depth, uint8. Length supernodes. */
	readonly depthParity: number;
	/** First value of each panel, uint32. Length supernodes. */
	readonly panelStart: number;
	/** The matrix's stored values, float64. */
	readonly values: number;
	/** Panels of L, row-major float64 at `panelStart`. Length `panelValues`. */
	readonly panels: number;
	/** Last child of each supernode, -1 without one, int32. Length supernodes. */
	readonly lastChild: number;
	/** Child of the same parent before each one, -1 at the first, int32. Length supernodes. */
	readonly previousSibling: number;
	/** Where each waiting update matrix lies, uint32 bytes. Length supernodes. */
	readonly updateStart: number;
	readonly own: ThreadSpace;
	/** The unknowns of a right-hand side, new numbering. n doubles. */
	readonly ownY: number;
	/** What only two threads need; then `own` is the space of the calling one. */
	readonly shared: SharedSpace | null;
}

/** Unknowns of one or several right-hand sides in a factor's memory, in the new numbering. */
export interface Unknowns {
	/** Where they lie, bytes: `lanes` doubles of each of n unknowns. */
	readonly at: number;
	/** The second thread's copy, where there is one. */
	readonly otherAt: number;
	readonly lanes: number;
}

/** A factor's memory with the kernels bound to it. */
export interface FactorMemory {
	readonly memory: WebAssembly.Memory;
	readonly isShared: boolean;
	readonly layout: FactorLayout;
	readonly kernels: Kernels;
	/** Bytes in use: the layout's, and what `extendMemory` added. */
	usedBytes: number;
	/** Where the lanes of a block of right-hand sides lie, once there was one. */
	lanes?: Unknowns;
}

/** Depth in the tree, lowest bit. */
function depthParities({ supernodes, parent }: SymbolicFactor): Uint8Array {
	const parity = new Uint8Array(supernodes);
	for (let s = supernodes - 1; s >= 0; s--) {
		if (parent[s] !== -1) parity[s] = 1 - parity[parent[s]];
	}
	return parity;
}

/**
 * Most values on a thread's two stacks while it factors the ranges in turn. Updates that other
 * threads made lie on their stacks and stay there.
 */
function stackNeeds(
	{ supernodes, start, rowStart, parent }: SymbolicFactor,
	parity: Uint8Array,
	ranges: Ranges
): StackNeeds {
	/** Values of this thread's updates that wait for each supernode. */
	const waiting = new Float64Array(supernodes);
	const top = [0, 0];
	const most = [0, 0];
	for (let r = 0; r < ranges.length; r += 2) {
		for (let s = ranges[r]; s < ranges[r + 1]; s++) {
			const below = rowStart[s + 1] - rowStart[s] - (start[s + 1] - start[s]);
			const side = parity[s];
			top[1 - side] -= waiting[s];
			top[side] += below ** 2;
			most[side] = Math.max(most[side], top[side]);
			if (parent[s] !== -1) waiting[parent[s]] += below ** 2;
		}
	}
	return { even: most[0], odd: most[1] };
}

/** Lays a factor out, with space for a second thread where the work is split. */
export function layOut(symbolic: SymbolicFactor, split: WorkSplit | null): FactorLayout {
	const { supernodes, n, rows, entryFrom, storedEntries, panelValues } = symbolic;
	const space = planSpace();
	const int32 = (length: number) => space.take(4 * length);
	const float64 = (length: number) => space.take(8 * length);
	const parity = depthParities(symbolic);
	const threadSpace = (ranges: Ranges): ThreadSpace => {
		const { even, odd } = stackNeeds(symbolic, parity, ranges);
		return {
			even: float64(even),
			odd: float64(odd),
			scratch: space.take(KERNEL_SIZES.denseScratchBytes)
		};
	};
	const layout = {
		start: int32(supernodes + 1),
		rowStart: int32(supernodes + 1),
		rows: int32(rows.length),
		relative: int32(rows.length),
		parent: int32(supernodes),
		entryStart: int32(supernodes + 1),
		entryFrom: int32(entryFrom.length),
		entryTo: int32(entryFrom.length),
		depthParity: space.take(supernodes),
		panelStart: int32(supernodes),
		values: float64(storedEntries),
		panels: float64(panelValues),
		lastChild: int32(supernodes),
		previousSibling: int32(supernodes),
		updateStart: int32(supernodes),
		own: threadSpace(split ? split.own : [0, supernodes]),
		ownY: float64(n),
		shared: split && {
			other: threadSpace(split.other),
			top: threadSpace(split.top),
			otherY: float64(n)
		}
	};
	return { ...layout, bytes: space.bytes };
}

/** The calls that bind kernels to a factor's memory, for the thread that works in `space`. */
export function bindCalls(layout: FactorLayout, space: ThreadSpace): KernelCall[] {
	const { start, rowStart, rows, relative, parent, depthParity, panelStart } = layout;
	const { entryStart, entryFrom, entryTo, values, panels } = layout;
	const { lastChild, previousSibling, updateStart } = layout;
	return [
		['bindSymbolic', start, rowStart, rows, relative, parent, depthParity, panelStart],
		[
			'bindNumeric',
			entryStart,
			entryFrom,
			entryTo,
			values,
			panels,
			lastChild,
			previousSibling,
			updateStart
		],
		['bindStacks', space.even, space.odd, space.scratch]
	];
}

/** Makes the memory of a factor and copies the analysis there. */
export function createFactorMemory(symbolic: SymbolicFactor, layout: FactorLayout): FactorMemory {
	const isShared = layout.shared !== null;
	const memory = takeMemory(layout.bytes, isShared);
	const { buffer } = memory;
	const put = (at: number, values: Int32Array) =>
		new Int32Array(buffer, at, values.length).set(values);
	put(layout.start, symbolic.start);
	put(layout.rowStart, symbolic.rowStart);
	put(layout.rows, symbolic.rows);
	put(layout.relative, symbolic.relative);
	put(layout.parent, symbolic.parent);
	put(layout.entryStart, symbolic.entryStart);
	put(layout.entryFrom, symbolic.entryFrom);
	put(layout.entryTo, symbolic.entryTo);
	new Uint8Array(buffer, layout.depthParity, symbolic.supernodes).set(depthParities(symbolic));
	new Uint32Array(buffer, layout.panelStart, symbolic.supernodes).set(
		symbolic.panelStart.subarray(0, symbolic.supernodes)
	);
	linkChildren(
		symbolic,
		new Int32Array(buffer, layout.lastChild, symbolic.supernodes),
		new Int32Array(buffer, layout.previousSibling, symbolic.supernodes)
	);
	const kernels = bindKernels(memory, isShared);
	return { memory, isShared, layout, kernels, usedBytes: layout.bytes };
}

/**
 * Takes more bytes behind everything else, with anything in them, and returns where they start.
 * Views of the memory have to be made anew. Throws a RangeError where the memory cannot grow.
 */
export function extendMemory(space: FactorMemory, bytes: number): number {
	const from = space.usedBytes;
	const missing = from + bytes - space.memory.buffer.byteLength;
	if (missing > 0) growMemory(space.memory, missing);
	space.usedBytes = Math.ceil((from + bytes) / 64) * 64;
	return from;
}

/** Gives the memory back for other factors: nothing of this one may be used any more. */
export function releaseFactorMemory({ memory, isShared }: FactorMemory): void {
	giveBackMemory(memory, isShared);
}

/** Puts the children of every supernode into lists. */
function linkChildren(
	{ supernodes, parent }: SymbolicFactor,
	last: Int32Array,
	previous: Int32Array
) {
	last.fill(-1);
	for (let s = 0; s < supernodes; s++) {
		const up = parent[s];
		previous[s] = up === -1 ? -1 : last[up];
		if (up !== -1) last[up] = s;
	}
}
