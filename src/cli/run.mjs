import { spawn } from 'node:child_process';
import { ROOT } from './paths.mjs';

/**
 * Runs a command to its end with its output shown.
 * @param {string} command
 * @param {readonly string[]} args
 * @param {{ env?: NodeJS.ProcessEnv, quiet?: boolean }} [options]
 * @returns {Promise<{ code: number, output: string }>}
 */
export function run(command, args, { env = process.env, quiet = false } = {}) {
	return new Promise((resolve) => {
		const child = spawn(command, args, {
			cwd: ROOT,
			env,
			stdio: quiet ? ['ignore', 'pipe', 'pipe'] : ['ignore', 'inherit', 'inherit']
		});
		let output = '';
		child.stdout?.on('data', (chunk) => (output += String(chunk)));
		child.stderr?.on('data', (chunk) => (output += String(chunk)));
		child.on('error', (error) => resolve({ code: 127, output: error.message }));
		child.on('exit', (code, signal) => resolve({ code: code ?? (signal ? 1 : 0), output }));
	});
}

/**
 * Ends a child process: SIGTERM first, SIGKILL after a while.
 * @param {import('node:child_process').ChildProcess} child
 * @param {number} [graceMs]
 * @returns {Promise<void>}
 */
export function end(child, graceMs = 8000) {
	return new Promise((resolve) => {
		if (child.exitCode !== null || child.signalCode !== null) return resolve();
		const timer = setTimeout(() => child.kill('SIGKILL'), graceMs);
		child.once('exit', () => {
			clearTimeout(timer);
			resolve();
		});
		child.kill('SIGTERM');
	});
}
