/**
 * The body of a second thread: makes kernel calls on a memory that it shares with its caller. Plain
 * JavaScript without imports, so that it starts quickly and needs no loader.
 */
import { parentPort } from 'node:worker_threads';

/**
 * What both sides know of a task: [state, answer].
 * States: 0 posted, 1 taken, 2 done, 3 taken back.
 *
 * @param {import('./worker-thread.ts').PostedTask} task
 */
function run({ module, memory, calls, control }) {
	const posted = Atomics.compareExchange(control, 0, 0, 1) === 0;
	if (!posted) return;
	let answer = -1;
	try {
		const { exports } = new WebAssembly.Instance(module, { env: { memory } });
		for (const [name, ...values] of calls) {
			const kernel = /** @type {(...values: number[]) => number | void} */ (exports[name]);
			const result = kernel(...values);
			if (result !== undefined && result !== -1) {
				answer = result;
				break;
			}
		}
	} catch {
		answer = -2;
	}
	Atomics.store(control, 1, answer);
	Atomics.store(control, 0, 2);
	Atomics.notify(control, 0);
}

parentPort?.on('message', run);
