import { KERNELS, SHARED_KERNELS } from './kernels-module.ts';

/**
 * What the WebAssembly module offers (sources in assembly/, compiled by `npm run build:kernels`).
 * Pointers are bytes of its memory; those beyond 2 GB wrap to negative numbers on the way, which
 * the module takes for what they were.
 */
export interface Kernels {
	bindSymbolic(
		start: number,
		rowStart: number,
		rows: number,
		relative: number,
		parent: number,
		depthParity: number,
		panelStart: number
	): void;
	bindNumeric(
		entryStart: number,
		entryFrom: number,
		entryTo: number,
		values: number,
		panels: number,
		lastChild: number,
		previousSibling: number,
		updateStart: number
	): void;
	bindStacks(even: number, odd: number, scratch: number): void;
	/** -1, or the column (new numbering) whose pivot is not a positive finite number. */
	factoriseRange(from: number, to: number): number;
	forward(from: number, to: number, y: number): void;
	backward(from: number, to: number, y: number): void;
	forwardPath(supernode: number, y: number): void;
	forwardLanes(from: number, to: number, y: number): void;
	backwardLanes(from: number, to: number, y: number): void;
	dotProduct(a: number, b: number, count: number): number;
	/** The number of pieces. */
	orderByPlace(
		n: number,
		rowStart: number,
		column: number,
		x: number,
		y: number,
		order: number,
		start: number,
		parent: number,
		work: number
	): number;
}

interface KernelConstants {
	readonly DENSE_SCRATCH_BYTES: WebAssembly.Global;
	readonly DISSECTION_BYTES: WebAssembly.Global;
	readonly DISSECTION_BYTES_PER_NODE: WebAssembly.Global;
	readonly LANES: WebAssembly.Global;
}

/** A call of a kernel by name, so that another thread can make it on the same memory. */
export type KernelCall = readonly [name: keyof Kernels, ...values: number[]];

/** Bytes of a WebAssembly page, and the most pages that 32-bit pointers reach. */
const PAGE_BYTES = 65536;
const MOST_PAGES = 65536;
/** No memory is larger. */
export const MOST_MEMORY_BYTES = PAGE_BYTES * MOST_PAGES;

function compile(base64: string): WebAssembly.Module {
	return new WebAssembly.Module(Uint8Array.from(atob(base64), (char) => char.charCodeAt(0)));
}

let ownModule: WebAssembly.Module | undefined;
let sharedModule: WebAssembly.Module | undefined;

/** The module for a memory of one thread, or for one that threads share; compiled once. */
export function kernelModule(isShared: boolean): WebAssembly.Module {
	if (isShared) return (sharedModule ??= compile(SHARED_KERNELS));
	return (ownModule ??= compile(KERNELS));
}

/** A memory of at least so many bytes, zero throughout. Throws a RangeError where there is none. */
export function createMemory(bytes: number, isShared: boolean): WebAssembly.Memory {
	return new WebAssembly.Memory({
		initial: Math.ceil(bytes / PAGE_BYTES),
		maximum: MOST_PAGES,
		shared: isShared
	});
}

/** Makes a memory larger by at least so many bytes. Its views have to be made anew. */
export function growMemory(memory: WebAssembly.Memory, bytes: number): void {
	memory.grow(Math.ceil(bytes / PAGE_BYTES));
}

export function bindKernels(memory: WebAssembly.Memory, isShared: boolean): Kernels {
	const instance = new WebAssembly.Instance(kernelModule(isShared), { env: { memory } });
	return instance.exports as unknown as Kernels;
}

/** Sizes that the kernels ask for, and how many right-hand sides go together. */
export const KERNEL_SIZES = readSizes();

function readSizes() {
	const memory = createMemory(0, false);
	const constants = bindKernels(memory, false) as unknown as KernelConstants;
	return {
		denseScratchBytes: Number(constants.DENSE_SCRATCH_BYTES.value),
		dissectionBytes: Number(constants.DISSECTION_BYTES.value),
		dissectionBytesPerNode: Number(constants.DISSECTION_BYTES_PER_NODE.value),
		lanes: Number(constants.LANES.value)
	};
}

/** Hands out parts of a memory that is still to be made. */
export interface SpacePlan {
	/** Takes so many bytes, aligned to 16; returns where they start. */
	take(bytes: number): number;
	/** Bytes taken so far. */
	readonly bytes: number;
}

const ALIGNMENT_BYTES = 16;

export function planSpace(): SpacePlan {
	// Nothing lies at 0: a pointer of 0 is one that was never set.
	let bytes = ALIGNMENT_BYTES;
	return {
		take(wanted) {
			const from = bytes;
			bytes += Math.ceil(wanted / ALIGNMENT_BYTES) * ALIGNMENT_BYTES;
			return from;
		},
		get bytes() {
			return bytes;
		}
	};
}

/** Makes the calls in turn; ends early, with its answer, at one that answers with a column. */
export function makeCalls(kernels: Kernels, calls: readonly KernelCall[]): number {
	for (const [name, ...values] of calls) {
		const kernel = kernels[name] as (...values: number[]) => number | void;
		const answer = kernel(...values);
		if (answer !== undefined && answer !== -1) return answer;
	}
	return -1;
}
