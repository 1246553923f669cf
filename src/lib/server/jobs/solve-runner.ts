import { resolve } from 'node:path';
import { Worker } from 'node:worker_threads';
import { config, type Config } from '../config.ts';
import { log } from '../log.ts';
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
	readonly #config: Config;
	#thread: Worker | undefined;

	constructor(limits = config()) {
		this.#config = limits;
	}

	run(
		request: SolveRequest,
		signal: AbortSignal,
		onProgress: (phase: string, fraction: number) => void
	): Promise<SolveAnswer> {
		signal.throwIfAborted();
		const { MANYWEIR_SOLVE_MEMORY_MB: limitMb, MANYWEIR_SOLVE_SECONDS: limitSeconds } =
			this.#config;
		const thread = (this.#thread ??= this.#start());
		return new Promise((fulfil, reject) => {
			const end = () => {
				thread.off('message', receive).off('error', crash).off('exit', exit);
				signal.removeEventListener('abort', abort);
				clearInterval(watch);
				clearTimeout(timeout);
			};
			const fail = (reason: Error) => {
				end();
				this.#drop(thread);
				reject(reason);
			};
			const receive = (reply: SolveReply) => {
				if (reply.type === 'progress') return onProgress(reply.phase, reply.fraction);
				end();
				if (reply.type === 'solved') fulfil(reply.answer);
				else reject(new JobRefused(reply.failure));
			};
			const crash = (error: NodeJS.ErrnoException) => fail(explain(error, limitMb));
			const exit = (code: number) => fail(new Error(`the solve thread ended with code ${code}`));
			const abort = () => fail(new Error(`solve ended: ${String(signal.reason)}`));
			// The thread's own limit counts objects, not the arrays that hold most of a solve.
			const watch = setInterval(() => {
				if (process.memoryUsage.rss() > limitMb * BYTES_PER_MB) fail(tooMuchMemory(limitMb));
			}, WATCH_INTERVAL_MS);
			const timeout = setTimeout(() => fail(tooMuchTime(limitSeconds)), limitSeconds * 1000);
			signal.addEventListener('abort', abort);
			thread.on('message', receive).on('error', crash).on('exit', exit);
			thread.postMessage(request);
		});
	}

	stop(): void {
		if (this.#thread) this.#drop(this.#thread);
	}

	#start(): Worker {
		const thread = new Worker(resolve(this.#config.MANYWEIR_SOLVE_THREAD), {
			resourceLimits: { maxOldGenerationSizeMb: this.#config.MANYWEIR_SOLVE_MEMORY_MB }
		});
		thread.unref();
		// Whatever happens to a thread that nobody waits for, the next solve starts another.
		thread.on('error', (error) => log.warn({ error }, 'the solve thread died'));
		thread.on('exit', () => this.#forget(thread));
		return thread;
	}

	#forget(thread: Worker): void {
		if (this.#thread === thread) this.#thread = undefined;
	}

	#drop(thread: Worker): void {
		this.#forget(thread);
		void thread.terminate();
	}
}

function tooMuchMemory(limitMb: number): JobRefused {
	return new JobRefused({
		message: `The plan needs more than the ${limitMb} MB that one solve may use. Use wider pitches, or ask an administrator for more memory.`,
		problems: []
	});
}

function tooMuchTime(limitSeconds: number): JobRefused {
	return new JobRefused({
		message: `The solve took longer than the ${limitSeconds} s that one may take. Use wider pitches, or ask an administrator for more time.`,
		problems: []
	});
}

/** Running out of memory is the plan's size, not the surroundings: trying again would not help. */
function explain(error: NodeJS.ErrnoException, limitMb: number): Error {
	const isOutOfMemory =
		error.code === 'ERR_WORKER_OUT_OF_MEMORY' || /array buffer allocation/i.test(error.message);
	return isOutOfMemory ? tooMuchMemory(limitMb) : error;
}
