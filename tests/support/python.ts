import { execFileSync } from 'node:child_process';

/** Debian's own Python, which its package python3-scipy belongs to; another on the path may lack it. */
const PYTHON = '/usr/bin/python3';
const MAX_OUTPUT_BYTES = 256 * 1024 * 1024;

/** Runs a script with Debian's SciPy and gives what it prints. */
export function runPython(script: string, ...args: string[]): string {
	try {
		return execFileSync(PYTHON, [script, ...args], {
			encoding: 'utf8',
			maxBuffer: MAX_OUTPUT_BYTES
		});
	} catch (error) {
		throw new Error(`${script} failed; it needs Debian's package python3-scipy`, { cause: error });
	}
}
