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
	orderMinimumDegree,
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
/** Name of the method by its elimination order. */
const METHODS = {
	dissection: 'multifrontal Cholesky on nested dissection, plain typed arrays',
	degree: 'multifrontal Cholesky on minimum degree, plain typed arrays'
} as const;
const DEFAULT_NODES = 1_000_000;

/** Coordinates of the unknowns. */
interface Places {
	readonly x: ArrayLike<number>;
	readonly y: ArrayLike<number>;
}

interface System {
	readonly matrix: SymmetricMatrix;
	readonly b: Float64Array;
	readonly places: Places | null;
	readonly buildSeconds: number;
}

function seconds(): number {
	return performance.now() / 1000;
}

function megabytes(bytes: number): string {
	return `${Math.ceil(bytes / 2 ** 20)} MB`;
}

/** The linear system of a bench plan: conductances of the grid, regulators tied to their set points. */
function systemOfPlan(nodes: number, kind: BenchCase): System & { readonly places: Places } {
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
	return { matrix, b, places: { x: xNm, y: yNm }, buildSeconds: seconds() - begin };
}

/** The system of a bench plan, written to Matrix Market files where their names are given. */
async function systemOfCase(
	nodes: number,
	kind: BenchCase,
	matrixPath: string | undefined,
	[rhsPath, coordsPath]: readonly string[]
): Promise<System> {
	const system = systemOfPlan(nodes, kind);
	if (matrixPath !== undefined) {
		await writeMatrix(matrixPath, system.matrix);
		await writeColumns(rhsPath, [system.b]);
		await writeColumns(coordsPath, [system.places.x, system.places.y]);
	}
	return system;
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
	if (coordsPath === undefined) return { matrix, b, places: null, buildSeconds: 0 };
	const [x, y] = await readColumns(coordsPath, 2);
	if (x.length !== matrix.n) {
		throw new MatrixFileError(`${coordsPath}: ${x.length} rows (expected ${matrix.n})`);
	}
	return { matrix, b, places: { x, y }, buildSeconds: 0 };
}

/** Solves a system from its matrix to its answer and times the phases. */
function time({ matrix, b, places, buildSeconds }: System, kind: BenchCase | 'matrix') {
	const begin = seconds();
	const order = places
		? orderNestedDissection(matrix, places.x, places.y)
		: orderMinimumDegree(matrix);
	const symbolic = analyse(matrix, order);
	const analysed = seconds();
	const result = factorise(symbolic, matrix, { limitBytes: process.availableMemory() });
	const factored = seconds();
	if (result.status === 'not-positive-definite') {
		return `the matrix is not positive definite at row ${result.row + 1} (expected a symmetric positive definite one)`;
	}
	if (result.status === 'too-large') {
		return `its factor takes ${megabytes(result.bytes)} (expected at most the ${megabytes(result.limitBytes)} that are free)`;
	}
	const solution = solveWith(result.factor, b);
	const solved = seconds();
	const line = {
		nodes: matrix.n,
		nonzeros: matrix.column.length,
		case: kind,
		threads: 1,
		method: places ? METHODS.dissection : METHODS.degree,
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
	try {
		const { matrix, rhs } = values;
		const isFile = matrix !== undefined && rhs !== undefined;
		const system = isFile
			? await systemOfFiles(matrix, rhs, values.coords)
			: await systemOfCase(nodes, kind, values.dump, positionals);
		const timed = time(system, isFile ? 'matrix' : kind);
		if (typeof timed === 'string') return failWith([`${values.matrix ?? 'system'}: ${timed}`]);
		if (values.out !== undefined) await writeColumns(values.out, [timed.solution]);
		process.stdout.write(`${JSON.stringify(timed.line)}\n`);
		return EXIT_SOLVED;
	} catch (error) {
		if (error instanceof MatrixFileError) return failWith([error.message]);
		if (error instanceof Error && 'code' in error && 'path' in error) {
			return failWith([
				`${String(error.path)}: ${error.message} (expected a Matrix Market file that may be read or written)`
			]);
		}
		throw error;
	}
}

await runCommand(bench);
