/** The product's processes: prepared database, web server, worker. Shared by start, dev and tests. */
import { fork } from 'node:child_process';
import { createServer } from 'node:net';
import { join } from 'node:path';
import { lastLine } from './install.mjs';
import { Refusal, ROOT } from './paths.mjs';
import { run } from './run.mjs';

const WORKER = join(ROOT, 'build', 'worker');

/**
 * Runs one of the bundled service commands to its end and gives what it printed.
 * @param {string} name
 * @param {NodeJS.ProcessEnv} env
 */
async function runCommand(name, env) {
	const { code, output } = await run(process.execPath, [join(WORKER, `${name}.js`)], {
		env,
		quiet: true
	});
	if (code !== 0) throw new Refusal(lastLine(output));
	return output;
}

/**
 * Migrates the database and loads the demo into an empty one.
 * @param {NodeJS.ProcessEnv} env
 * @returns {Promise<{ password: string, people: { name: string, email: string, role: string }[] } | null>}
 */
export async function prepareDatabase(env) {
	await runCommand('migrate', env);
	const demo = await runCommand('load-demo', env);
	return demo.trim() === '' ? null : JSON.parse(lastLine(demo));
}

/** Refuses a port that something else listens on. @param {string} host @param {number} port @returns {Promise<void>} */
export function requireFreePort(host, port) {
	return new Promise((resolve, reject) => {
		const probe = createServer();
		probe.once('error', (/** @type {NodeJS.ErrnoException} */ error) => {
			const reason =
				error.code === 'EADDRINUSE' ? 'is taken: stop what uses it, or set PORT' : error.message;
			reject(new Refusal(`Port ${port} of ${host} ${reason}.`));
		});
		probe.listen(port, host, () => probe.close(() => resolve()));
	});
}

/**
 * Starts a process that ends with us: it hears when the channel to us closes.
 * @param {string} file
 * @param {NodeJS.ProcessEnv} env
 */
export function startProcess(file, env) {
	// Its own group: Ctrl-C reaches us, and we stop the parts in order.
	return fork(file, {
		cwd: ROOT,
		env,
		stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
		detached: true
	});
}

export const WEB_ENTRY = join(ROOT, 'src', 'cli', 'serve.mjs');
export const WORKER_ENTRY = join(WORKER, 'worker.js');

/** Waits for a process's word that it is ready. @param {import('node:child_process').ChildProcess} child @returns {Promise<void>} */
export function untilReady(child) {
	return new Promise((resolve, reject) => {
		child.once('message', () => resolve());
		child.once('exit', () =>
			reject(new Refusal('A part of the product did not start; its reason stands above.'))
		);
	});
}
