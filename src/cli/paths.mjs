import { existsSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** The project's root. */
export const ROOT = dirname(dirname(dirname(fileURLToPath(import.meta.url))));
/** Everything that running the product leaves behind; ignored by git. */
export const STATE = join(ROOT, '.manyweir');

/** Something that the person who started the command can mend; printed as one line. */
export class Refusal extends Error {}

/**
 * Runs a command's work: a refusal is printed as one line, and the exit code is not 0.
 * @param {() => Promise<void>} work
 */
export async function runScript(work) {
	try {
		await work();
	} catch (error) {
		if (!(error instanceof Refusal)) throw error;
		console.error(error.message);
		process.exit(1);
	}
}

/** @param {string} path relative to the root */
export function isThere(path) {
	return existsSync(join(ROOT, path));
}
