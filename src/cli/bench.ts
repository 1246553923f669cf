/**
 * Times the sparse solver on a grid of a wanted size, or on a system from Matrix Market files.
 * Prints one line of JSON; reading and writing files is not counted.
 */
import { performance } from 'node:perf_hooks';
import { parseArgs } from 'node:util';
import { meshFloorplan, resistancesAt } from '#lib/mesh/index.ts';
import {
	analyse,
	assembleLaplacian,
	factorise,
	levelCoordinates,
	orderNestedDissection,
	planAssembly,
	relativeResidual,
	solveWith,
	type SymmetricMatrix
} from '#lib/sparse/index.ts';
import { BENCH_CASES, makeBenchPlan, type BenchCase } from './bench-plan.ts';
import {
	MatrixFileError,
	readColumns,
	readMatrix,
	writeColumns,
	writeMatrix
} from './matrix-market.ts';
import { EXIT_SOLVED, failWith, problemLines, runCommand } from './plan-input.ts';

const USAGE =
	'bench -- [--nodes N] [--case uniform|irregular|strong] [--json] [--dump A.mtx b.mtx xy.mtx] | --matrix A.mtx --rhs b.mtx [--coords xy.mtx] [--out x.mtx]';
const METHOD = 'multifrontal Cholesky on nested dissection, plain typed arrays';
const DEFAULT_NODES = 1_000_000;

interface System {
	readonly matrix: SymmetricMatrix;
	readonly b: Float64Array;
	readonly x: ArrayLike<number>;
	readonly y: ArrayLike<number>;
	readonly buildSeconds: number;
}

function seconds(): number {
	return performance.now() / 1000;
}

/** The linear system of a bench plan: conductances of the grid, regulators tied to their set points. */
function systemOfPlan(nodes: number, kind: BenchCase): System {
	const floorplan = makeBenchPlan(nodes, kind);
	const begin = seconds();
	const meshed = meshFloorplan(floorplan);
	if (meshed.status === 'refused') throw new Error(problemLines(meshed.problems).join('; '));
	const { network } = meshed;
	const resistances = resistancesAt(network, floorplan, floorplan.corners[0]);
	if (resistances.status === 'refused') {
		throw new Error(problemLines(resistances.problems).join('; '));
	}
	const { resistors, regulators, loads } = network;
	const tie = new Float64Array(network.nodes.count);
	const outputOhm = floorplan.cells[0].outputOhm;
	for (const node of regulators.outputNode) if (node >= 0) tie[node] += 1 / outputOhm;
	const conductance = resistances.ohm.map((ohm) => 1 / ohm);
	const plan = planAssembly(network.nodes.count, resistors.from, resistors.to);
	const matrix = assembleLaplacian(plan, conductance, tie);
	const b = new Float64Array(network.nodes.count);
	for (let k = 0; k < loads.count; k++) {
		b[loads.node[k]] += loads.share[k] * (floorplan.blocks[loads.block[k]].amps.run ?? 0);
	}
	const { xNm, yNm } = network.nodes;
	return { matrix, b, x: xNm, y: yNm, buildSeconds: seconds() - begin };
}

async function systemOfFiles(
	matrixPath: string,
	rhsPath: string,
	coordsPath?: string
): Promise<System> {
	const matrix = await readMatrix(matrixPath);
	const [b] = await readColumns(rhsPath, 1);
	if (b.length !== matrix.n) {
		throw new MatrixFileError(`${rhsPath}: ${b.length} values (expected ${matrix.n})`);
	}
	if (!coordsPath) {
		const begin = seconds();
		const { x, y } = levelCoordinates(matrix);
		return { matrix, b, x, y, buildSeconds: seconds() - begin };
	}
	const [x, y] = await readColumns(coordsPath, 2);
	if (x.length !== matrix.n) {
		throw new MatrixFileError(`${coordsPath}: ${x.length} rows (expected ${matrix.n})`);
	}
	return { matrix, b, x, y, buildSeconds: 0 };
}

/** Solves a system from its matrix to its answer and times the phases. */
function time({ matrix, b, x, y, buildSeconds }: System, kind: BenchCase | 'matrix') {
	const begin = seconds();
	const symbolic = analyse(matrix, orderNestedDissection(matrix, x, y));
	const analysed = seconds();
	const result = factorise(symbolic, matrix);
	const factored = seconds();
	if (result.status === 'not-positive-definite') {
		return `the matrix is not positive definite at row ${result.row + 1} (expected a symmetric positive definite one)`;
	}
	if (result.status === 'too-large') {
		return `the factor needs ${result.bytes} bytes (expected at most ${result.limitBytes})`;
	}
	const solution = solveWith(result.factor, b);
	const solved = seconds();
	const line = {
		nodes: matrix.n,
		nonzeros: matrix.column.length,
		case: kind,
		threads: 1,
		method: METHOD,
		seconds: {
			build: buildSeconds,
			analyse: analysed - begin,
			factor: factored - analysed,
			solve: solved - factored,
			total: buildSeconds + solved - begin
		},
		iterations: 0,
		residual: relativeResidual(matrix, solution, b),
		peakMb: process.resourceUsage().maxRSS / 1024
	};
	return { line, solution };
}

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
			dump: { type: 'string' }
		}
	});
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
	if (positionals.length !== (values.dump === undefined ? 0 : 2)) {
		return failWith([
			`arguments: unexpected ${positionals.join(' ') || 'end'} (expected ${USAGE})`
		]);
	}
	try {
		const isFile = values.matrix !== undefined && values.rhs !== undefined;
		const system = isFile
			? await systemOfFiles(values.matrix ?? '', values.rhs ?? '', values.coords)
			: systemOfPlan(nodes, kind);
		if (values.dump !== undefined) {
			await writeMatrix(values.dump, system.matrix);
			await writeColumns(positionals[0], [system.b]);
			await writeColumns(positionals[1], [system.x, system.y]);
		}
		const timed = time(system, isFile ? 'matrix' : kind);
		if (typeof timed === 'string') return failWith([`${values.matrix ?? 'system'}: ${timed}`]);
		if (values.out !== undefined) await writeColumns(values.out, [timed.solution]);
		process.stdout.write(`${JSON.stringify(timed.line)}\n`);
		return EXIT_SOLVED;
	} catch (error) {
		if (error instanceof MatrixFileError) return failWith([error.message]);
		if (error instanceof Error && 'code' in error && 'path' in error) {
			return failWith([`${String(error.path)}: ${error.message}`]);
		}
		throw error;
	}
}

await runCommand(bench);
