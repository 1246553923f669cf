/**
 * Times the sparse solver on a grid of a wanted size, or on a system from Matrix Market files; with
 * `--edits` and `--studies` what follows on its kept factor. Prints one line of JSON for each;
 * reading and writing files is not counted.
 */
import { availableParallelism } from 'node:os';
import { parseArgs } from 'node:util';
import { relativeResidual } from '#lib/sparse/index.ts';
import { WorkerThread } from '#lib/threads/index.ts';
import { timeEdits, timeStudies } from './bench-edits.ts';
import { BENCH_CASES, type BenchCase } from './bench-plan.ts';
import { solveSystem, type Solved } from './bench-solve.ts';
import { peakMb, spreadOf } from './bench-statistics.ts';
import {
	systemOfFiles,
	systemOfPlan,
	writeSystem,
	type PlanSystem,
	type System
} from './bench-system.ts';
import { MatrixFileError, writeColumns } from './matrix-market.ts';
import { EXIT_SOLVED, failWith, runCommand } from './plan-input.ts';

const USAGE =
	'bench -- [--nodes N] [--case uniform|irregular|strong] [--threads 1|2] [--repeats N] [--edits] [--studies] [--json] [--dump A.mtx b.mtx xy.mtx] | --matrix A.mtx --rhs b.mtx [--coords xy.mtx] [--out x.mtx]';
const DEFAULT_NODES = 1_000_000;
const MOST_THREADS = 2;
/** Edits of each kind that are timed. */
const EDIT_REPEATS = 60;

function readArguments() {
	return parseArgs({
		args: process.argv.slice(2),
		allowPositionals: true,
		options: {
			nodes: { type: 'string' },
			case: { type: 'string', default: 'uniform' },
			// The line is JSON in any case; the option is kept for scripts that ask for it.
			json: { type: 'boolean', default: false },
			matrix: { type: 'string' },
			rhs: { type: 'string' },
			coords: { type: 'string' },
			out: { type: 'string' },
			dump: { type: 'string' },
			threads: { type: 'string' },
			repeats: { type: 'string' },
			edits: { type: 'boolean', default: false },
			studies: { type: 'boolean', default: false }
		}
	});
}

type Source =
	| { readonly kind: 'matrix'; readonly system: System }
	| { readonly kind: BenchCase; readonly make: () => PlanSystem };

function print(line: object): void {
	process.stdout.write(`${JSON.stringify(line)}\n`);
}

/** The number of an option that is not given, or null where it is no whole number of 1 or more. */
function wholeNumber(text: string | undefined, fallback: number): number | null {
	if (text === undefined) return fallback;
	const value = Number(text);
	return Number.isInteger(value) && value >= 1 ? value : null;
}

/**
 * Solves the system so many times in this process, each time from the plan where there is one; the
 * seconds are medians, and `p95` where there were repeats. A text where it cannot be solved.
 */
function timeSolves(source: Source, repeats: number, secondThread: WorkerThread | null) {
	const runs: { build: number; analyse: number; factor: number; solve: number; total: number }[] =
		[];
	/** What a round leaves is dropped before the next, so that it is no part of that one's memory. */
	let last: { system: System; planSystem: PlanSystem | null; solved: Solved } | null = null;
	for (let round = 0; round < repeats; round++) {
		last = null;
		const planSystem = source.kind === 'matrix' ? null : source.make();
		const system = source.kind === 'matrix' ? source.system : planSystem;
		if (!system) continue;
		const solved = solveSystem(system, secondThread);
		if (typeof solved === 'string') return solved;
		const { analyse, factor, solve } = solved.seconds;
		const build = system.buildSeconds;
		runs.push({ build, analyse, factor, solve, total: build + analyse + factor + solve });
		last = { system, planSystem, solved };
	}
	if (!last) throw new Error('nothing was solved');
	const { system, solved } = last;
	const phases = ['build', 'analyse', 'factor', 'solve', 'total'] as const;
	const spread = phases.map((phase) => spreadOf(runs.map((run) => run[phase])));
	const secondsOf = (which: 'median' | 'p95') =>
		Object.fromEntries(phases.map((phase, k) => [phase, spread[k][which]]));
	const { matrix, b } = system;
	const line = {
		nodes: matrix.n,
		nonzeros: matrix.column.length,
		case: source.kind,
		threads: solved.threads,
		method: solved.method,
		seconds: secondsOf('median'),
		...(repeats > 1 && { repeats, p95: secondsOf('p95') }),
		iterations: 0,
		residual: relativeResidual(matrix, solved.solution, b),
		peakMb: peakMb()
	};
	return { line, ...last };
}

async function bench(): Promise<number> {
	let parsed: ReturnType<typeof readArguments>;
	try {
		parsed = readArguments();
	} catch (error) {
		return failWith([
			`arguments: ${error instanceof Error ? error.message : String(error)} (expected ${USAGE})`
		]);
	}
	const { values, positionals } = parsed;
	const kind = BENCH_CASES.find((one) => one === values.case);
	if (!kind) return failWith([`--case: ${values.case} (expected ${BENCH_CASES.join(', ')})`]);
	const nodes = values.nodes === undefined ? DEFAULT_NODES : Number(values.nodes);
	if (!Number.isInteger(nodes) || nodes < 2) {
		return failWith([`--nodes: ${values.nodes} (expected a whole number of 2 or more)`]);
	}
	if ((values.matrix === undefined) !== (values.rhs === undefined)) {
		return failWith([`arguments: --matrix and --rhs go together (expected ${USAGE})`]);
	}
	if (values.matrix === undefined && values.coords !== undefined) {
		return failWith(['--coords: no system to place (expected --matrix and --rhs with it)']);
	}
	if (values.matrix !== undefined && values.dump !== undefined) {
		return failWith(['--dump: writes the system of a case (expected no --matrix with it)']);
	}
	if (positionals.length !== (values.dump === undefined ? 0 : 2)) {
		return failWith([
			`arguments: unexpected ${positionals.join(' ') || 'end'} (expected ${USAGE})`
		]);
	}
	const threads = wholeNumber(values.threads, Math.min(MOST_THREADS, availableParallelism()));
	if (threads === null || threads > MOST_THREADS) {
		return failWith([`--threads: ${values.threads} (expected 1 or ${MOST_THREADS})`]);
	}
	const repeats = wholeNumber(values.repeats, 1);
	if (repeats === null) {
		return failWith([`--repeats: ${values.repeats} (expected a whole number of 1 or more)`]);
	}
	if (values.matrix !== undefined && (values.edits || values.studies)) {
		return failWith(['--edits, --studies: need the plan of a case (expected no --matrix)']);
	}
	const secondThread = threads > 1 ? new WorkerThread() : null;
	try {
		const { matrix, rhs } = values;
		const dump = values.dump === undefined ? null : ([values.dump, ...positionals] as const);
		const source: Source =
			matrix !== undefined && rhs !== undefined
				? { kind: 'matrix', system: await systemOfFiles(matrix, rhs, values.coords) }
				: { kind, make: () => systemOfPlan(nodes, kind) };
		const timed = timeSolves(source, repeats, secondThread);
		if (typeof timed === 'string') return failWith([`${values.matrix ?? 'system'}: ${timed}`]);
		const { system, solved, planSystem } = timed;
		print(timed.line);
		if (values.out !== undefined) await writeColumns(values.out, [solved.solution]);
		if (dump && planSystem) await writeSystem(planSystem, [dump[0], dump[1], dump[2]]);
		const about = { nodes: system.matrix.n, case: kind, threads: solved.threads };
		if (values.studies && planSystem) print({ ...about, studies: timeStudies(planSystem, solved) });
		if (values.edits && planSystem) {
			print({ ...about, edits: timeEdits(planSystem, solved, EDIT_REPEATS) });
		}
		return EXIT_SOLVED;
	} catch (error) {
		if (error instanceof MatrixFileError) return failWith([error.message]);
		if (error instanceof Error && 'code' in error && 'path' in error) {
			return failWith([
				`${String(error.path)}: ${error.message} (expected a Matrix Market file that may be read or written)`
			]);
		}
		throw error;
	} finally {
		await secondThread?.stop();
	}
}

await runCommand(bench);
