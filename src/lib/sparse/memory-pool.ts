import { createMemory, growMemory } from './kernels.ts';

/** Idle memories that are kept; engines count WebAssembly memories too late to free them in time. */
const MOST_IDLE = 8;

interface Idle {
	readonly memory: WebAssembly.Memory;
	readonly isShared: boolean;
}

/** Memories that were given back, in no order. */
const idle: Idle[] = [];

function bytesOf({ memory }: Idle): number {
	return memory.buffer.byteLength;
}

/**
 * A memory of at least so many bytes: the smallest idle one that is large enough, else the largest
 * idle one made larger, else a new one. What it holds is not known. Throws a RangeError where there
 * is none to be had.
 */
export function takeMemory(bytes: number, isShared: boolean): WebAssembly.Memory {
	const fitting = idle
		.filter((one) => one.isShared === isShared)
		.sort((a, b) => bytesOf(a) - bytesOf(b));
	const chosen = fitting.find((one) => bytesOf(one) >= bytes) ?? fitting.at(-1);
	if (!chosen) return createMemory(bytes, isShared);
	idle.splice(idle.indexOf(chosen), 1);
	const missing = bytes - bytesOf(chosen);
	if (missing > 0) growMemory(chosen.memory, missing);
	return chosen.memory;
}

/** Gives a memory back that nobody uses any more; one that is idle already stays so. */
export function giveBackMemory(memory: WebAssembly.Memory, isShared: boolean): void {
	if (idle.some((one) => one.memory === memory)) return;
	idle.push({ memory, isShared });
	if (idle.length <= MOST_IDLE) return;
	const smallest = idle.reduce((least, one) => (bytesOf(one) < bytesOf(least) ? one : least));
	idle.splice(idle.indexOf(smallest), 1);
}
