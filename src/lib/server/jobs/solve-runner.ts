import { resolve } from 'node:path';
import { Worker } from 'node:worker_threads';
import { config } from '../config.ts';
import { JobRefused } from './job-kind.ts';
import type { SolveAnswer, SolveReply, SolveRequest } from './solve-messages.ts';

const BYTES_PER_MB = 1024 * 1024;
/** How often the memory of the process is looked at. */
const WATCH_INTERVAL_MS = 250;

/**
 * Runs solves in a thread that is kept between them, so that modes of one plan share its mesh and
 * factors. A solve that is no longer wanted, or that dies, takes the thread with it; the next one
 * starts another.
 */
export class SolveRunner {
	#thread: Worker | undefined;

	run(
		request: SolveRequest,
		signal: AbortSignal,
		onProgress: (phase: string, fraction: number) => void
	): Promise<SolveAnswer> {
		signal.throwIfAborted();
		const thread = (this.#thread ??= this.#start());
		return new Promise((fulfil, reject) => {
			const end = () => {
				thread.removeAllListeners('message');
				thread.removeAllListeners('error');
				thread.removeAllListeners('exit');
				signal.removeEventListener('abort', abort);
				clearInterval(watch);
				clearTimeout(timeout);
			};
			const fail = (reason: Error) => {
				end();
				this.#drop(thread);
				reject(reason);
			};
			const abort = () => fail(new Error(`solve ended: ${String(signal.reason)}`));
			signal.addEventListener('abort', abort);
			// The thread's own limit counts objects, not the arrays that hold most of a solve.
			const watch = setInterval(() => {
				if (process.memoryUsage.rss() > config().MANYWEIR_SOLVE_MEMORY_MB * BYTES_PER_MB) {
					fail(tooMuchMemory());
				}
			}, WATCH_INTERVAL_MS);
			const timeout = setTimeout(() => fail(tooMuchTime()), config().MANYWEIR_SOLVE_SECONDS * 1000);
			thread.on('message', (reply: SolveReply) => {
				if (reply.type === 'progress') return onProgress(reply.phase, reply.fraction);
				end();
				if (reply.type === 'solved') fulfil(reply.answer);
				else reject(new JobRefused(reply.failure));
			});
			thread.on('error', (error: NodeJS.ErrnoException) => fail(explain(error)));
			thread.on('exit', (code) => fail(new Error(`the solve thread ended with code ${code}`)));
			thread.postMessage(request);
		});
	}

	stop(): void {
		if (this.#thread) this.#drop(this.#thread);
	}

	#start(): Worker {
		const thread = new Worker(resolve(config().MANYWEIR_SOLVE_THREAD), {
			resourceLimits: { maxOldGenerationSizeMb: config().MANYWEIR_SOLVE_MEMORY_MB }
		});
		thread.unref();
		return thread;
	}

	#drop(thread: Worker): void {
		if (this.#thread === thread) this.#thread = undefined;
		void thread.terminate();
	}
}

/** Running out of memory is the plan's size, not the surroundings: trying again would not help. */
function explain(error: NodeJS.ErrnoException): Error {
	const isOutOfMemory =
		error.code === 'ERR_WORKER_OUT_OF_MEMORY' || /array buffer allocation/i.test(error.message);
	return isOutOfMemory ? tooMuchMemory() : error;
}

function tooMuchMemory(): JobRefused {
	return new JobRefused({
		message: `The plan needs more than the ${config().MANYWEIR_SOLVE_MEMORY_MB} MB that one solve may use. Use wider pitches, or ask an administrator for more memory.`,
		problems: []
	});
}

function tooMuchTime(): JobRefused {
	return new JobRefused({
		message: `The solve took longer than the ${config().MANYWEIR_SOLVE_SECONDS} s that one may take. Use wider pitches, or ask an administrator for more time.`,
		problems: []
	});
}
