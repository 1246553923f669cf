import { availableParallelism, cpus, totalmem } from 'node:os';
import { run } from '../../../src/cli/run.mjs';

const PACKAGES = ['libcholmod3', 'libhypre-dev', 'libeigen3-dev', 'libopenblas0-pthread', 'g++'];

/**
 * The machine and the versions that a table of times belongs to.
 * @returns {Promise<string[]>}
 */
export async function describeMachine() {
	const query = ['-W', '-f', '${Package} ${Version}\\n', ...PACKAGES];
	const { output } = await run('dpkg-query', query, { quiet: true });
	return [
		`${cpus()[0].model}, ${availableParallelism()} cores, ${Math.round(totalmem() / 2 ** 30)} GB`,
		`Node ${process.versions.node}, ${output.trim().split('\n').join(', ')}`
	];
}
