import { availableParallelism } from 'node:os';
import { Worker } from 'node:worker_threads';
import { SECOND_THREAD_ROWS, type SecondThread, type ThreadTask } from '#lib/sparse/index.ts';

/** States of a task, in `control[0]`; the thread's answer is in `control[1]`. */
const POSTED = 0;
const TAKEN = 1;
const TAKEN_BACK = 3;
/** Answer of a thread in which the kernels failed. */
const BROKEN = -2;

export interface PostedTask extends ThreadTask {
	readonly control: Int32Array<SharedArrayBuffer>;
}

/** A second thread of Node's for the sparse engine. It does not keep the process alive. */
export class WorkerThread implements SecondThread {
	readonly #worker: Worker;
	#control: PostedTask['control'] | undefined;

	constructor() {
		this.#worker = new Worker(new URL('./second-thread.js', import.meta.url));
		this.#worker.unref();
		// A thread that is gone begins no task: its caller takes them back.
		this.#worker.on('error', () => undefined);
	}

	start(task: ThreadTask): void {
		this.#control = new Int32Array(new SharedArrayBuffer(8));
		this.#worker.postMessage({ ...task, control: this.#control } satisfies PostedTask);
	}

	finish(): number | null {
		const control = this.#control;
		if (!control) throw new Error('no task was started');
		this.#control = undefined;
		if (Atomics.compareExchange(control, 0, POSTED, TAKEN_BACK) === POSTED) return null;
		Atomics.wait(control, 0, TAKEN);
		if (control[1] === BROKEN) throw new Error('the kernels failed in the second thread');
		return control[1];
	}

	/** Ends the thread. */
	async stop(): Promise<void> {
		await this.#worker.terminate();
	}
}

/** A second thread for a network whose largest net has so many nodes, null where none would gain. */
export function threadFor(largestNet: number): WorkerThread | null {
	const isWorthIt = largestNet >= SECOND_THREAD_ROWS && availableParallelism() > 1;
	return isWorthIt ? new WorkerThread() : null;
}
