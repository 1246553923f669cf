import type { KernelCall } from './kernels.ts';

/** Kernel calls on a memory that two threads share. */
export interface ThreadTask {
	readonly module: WebAssembly.Module;
	readonly memory: WebAssembly.Memory;
	readonly calls: readonly KernelCall[];
}

/** A thread that makes kernel calls while its caller goes on. One task at a time. */
export interface SecondThread {
	start(task: ThreadTask): void;
	/**
	 * Waits for the task's end without returning to the event loop.
	 *
	 * @returns the answer of `makeCalls`, or null where the thread has not begun (it is not ready yet,
	 * or gone): the task is taken back and is the caller's
	 */
	finish(): number | null;
}
