import { readdirSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { lastLine, openBlasFolder } from '../../../src/cli/install.mjs';
import { Refusal } from '../../../src/cli/paths.mjs';
import { run } from '../../../src/cli/run.mjs';

const SOURCES = dirname(fileURLToPath(import.meta.url));

/**
 * @typedef {{ name: string, argument: string, processes: number, env: NodeJS.ProcessEnv }} Method
 * `processes` is 0 where the method does not use MPI.
 *
 * @typedef {{ nodes: number, ms: number, residual: number, peakMb: number }} Timing
 * One run: milliseconds from the matrix in memory to the answer, and its true relative residual.
 */

/** Threads that wait for each other sleep: where the machine is shared, turning is much slower. */
const TWO_THREADS = {
	OPENBLAS_NUM_THREADS: '2',
	OMP_THREAD_LIMIT: '2',
	OMP_WAIT_POLICY: 'passive'
};
const ONE_THREAD = { OPENBLAS_NUM_THREADS: '1', OMP_THREAD_LIMIT: '1' };

/** @type {readonly Method[]} */
export const METHODS = [
	{
		name: 'CHOLMOD, own order',
		argument: 'cholmod-own-order',
		processes: 0,
		env: TWO_THREADS
	},
	{
		name: 'CHOLMOD, given order',
		argument: 'cholmod-given-order',
		processes: 0,
		env: TWO_THREADS
	},
	{
		name: 'the same, 1 thread',
		argument: 'cholmod-given-order',
		processes: 0,
		env: ONE_THREAD
	},
	{ name: 'Eigen, 1 thread', argument: 'eigen', processes: 0, env: ONE_THREAD },
	{ name: 'hypre', argument: 'hypre', processes: 2, env: ONE_THREAD },
	{ name: 'hypre, aggressive', argument: 'hypre-aggressive', processes: 2, env: ONE_THREAD },
	{ name: 'the same, 1 process', argument: 'hypre-aggressive', processes: 1, env: ONE_THREAD }
];

const program = (/** @type {string} */ folder) => join(folder, 'native');

/**
 * Builds the program for this machine.
 * @param {string} folder
 */
export async function buildProgram(folder) {
	const sources = readdirSync(SOURCES).filter((name) => name.endsWith('.cpp'));
	const { code, output } = await run(
		'mpicxx',
		[
			...['-std=c++20', '-O3', '-march=native', '-pthread', '-DOMPI_SKIP_MPICXX'],
			...['-isystem', '/usr/include/hypre', '-isystem', '/usr/include/eigen3'],
			...sources.map((name) => join(SOURCES, name)),
			...['-lcholmod', '-lHYPRE', '-o', program(folder)]
		],
		{ quiet: true }
	);
	if (code !== 0) throw new Refusal(`Building the comparison program failed:\n${output}`);
}

/**
 * Runs a command that prints one line of JSON.
 * @param {string} command
 * @param {readonly string[]} args
 * @param {NodeJS.ProcessEnv} [env]
 */
async function runForLine(command, args, env = {}) {
	const { code, output } = await run(command, args, {
		env: { ...process.env, ...env },
		quiet: true
	});
	const line = output.split('\n').find((one) => one.startsWith('{'));
	if (code !== 0 || line === undefined) {
		throw new Refusal(`${command} ${args[0]} failed (${code}): ${lastLine(output)}`);
	}
	return JSON.parse(line);
}

/**
 * One run of a native method on the system in the files.
 * @param {string} folder
 * @param {Method} method
 * @param {readonly string[]} files matrix, right-hand side, coordinates
 * @returns {Promise<Timing>}
 */
export async function timeMethod(folder, { argument, processes, env }, files) {
	const own = [program(folder), argument, ...files];
	const [command, ...args] =
		processes === 0 ? own : ['mpiexec', '-n', String(processes), '--oversubscribe', ...own];
	const line = await runForLine(command, args, {
		...env,
		LD_LIBRARY_PATH: openBlasFolder() ?? '',
		// In a container everybody may be root.
		OMPI_ALLOW_RUN_AS_ROOT: '1',
		OMPI_ALLOW_RUN_AS_ROOT_CONFIRM: '1',
		// A process that waits for the other lets somebody else have its core meanwhile.
		OMPI_MCA_mpi_yield_when_idle: '1'
	});
	return { nodes: line.nodes, ms: line.ms.total, residual: line.residual, peakMb: line.peakMb };
}

/**
 * One run of our own engine: the bench command, which can leave the system in files.
 * @param {number} nodes
 * @param {string} kind
 * @param {readonly string[]} files none, or matrix, right-hand side and coordinates to be written
 * @returns {Promise<Timing>}
 */
export async function timeOurs(nodes, kind, files) {
	const line = await runForLine('npm', [
		...['run', '-s', 'bench', '--', '--nodes', String(nodes), '--case', kind],
		...(files.length > 0 ? ['--dump', ...files] : [])
	]);
	const { analyse, factor, solve } = line.seconds;
	return {
		nodes: line.nodes,
		ms: 1000 * (analyse + factor + solve),
		residual: line.residual,
		peakMb: line.peakMb
	};
}
