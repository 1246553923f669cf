import { performance } from 'node:perf_hooks';
import { meshFloorplan, resistancesAt } from '#lib/mesh/index.ts';
import {
	assembleLaplacian,
	planAssembly,
	type AssemblyPlan,
	type SymmetricMatrix
} from '#lib/sparse/index.ts';
import { makeBenchPlan, type BenchCase } from './bench-plan.ts';
import {
	MatrixFileError,
	readColumns,
	readMatrix,
	writeColumns,
	writeMatrix
} from './matrix-market.ts';
import { problemLines } from './plan-input.ts';

/** A linear system to be solved; coordinates where there are any. */
export interface System {
	readonly matrix: SymmetricMatrix;
	readonly b: Float64Array;
	readonly places: { readonly x: ArrayLike<number>; readonly y: ArrayLike<number> } | null;
	readonly buildSeconds: number;
}

/** The system of a bench plan, with what its edits need. */
export interface PlanSystem extends System {
	readonly places: { readonly x: Int32Array; readonly y: Int32Array };
	readonly plan: AssemblyPlan;
	/** Of each edge of the plan, S. */
	readonly conductance: Float64Array;
	/** What ties each node to a source, S. */
	readonly tie: Float64Array;
	/** Node of each regulator, and what each one ties it with, S. */
	readonly regulatorNode: Int32Array;
	readonly regulatorSiemens: number;
	/** Nodes of the first block, and its current at each, A. */
	readonly blockNode: Int32Array;
	readonly blockAmps: Float64Array;
}

export function seconds(): number {
	return performance.now() / 1000;
}

/** Conductances of the grid, regulators tied to their set points, loads as currents. */
export function systemOfPlan(nodes: number, kind: BenchCase): PlanSystem {
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
	const regulatorSiemens = 1 / floorplan.cells[0].outputOhm;
	for (const node of regulators.outputNode) if (node >= 0) tie[node] += regulatorSiemens;
	const conductance = resistances.ohm;
	for (let r = 0; r < conductance.length; r++) conductance[r] = 1 / conductance[r];
	const plan = planAssembly(network.nodes.count, resistors.from, resistors.to);
	const matrix = assembleLaplacian(plan, conductance, tie);
	const b = new Float64Array(network.nodes.count);
	const ampsOf = (load: number) =>
		loads.share[load] * (floorplan.blocks[loads.block[load]].amps.run ?? 0);
	for (let load = 0; load < loads.count; load++) b[loads.node[load]] += ampsOf(load);
	const buildSeconds = seconds() - begin;
	const ofBlock = Array.from(loads.block.keys()).filter((load) => loads.block[load] === 0);
	const { xNm, yNm } = network.nodes;
	return {
		matrix,
		b,
		places: { x: xNm, y: yNm },
		buildSeconds,
		plan,
		conductance,
		tie,
		regulatorNode: regulators.outputNode.filter((node) => node >= 0),
		regulatorSiemens,
		blockNode: Int32Array.from(ofBlock, (load) => loads.node[load]),
		blockAmps: Float64Array.from(ofBlock, ampsOf)
	};
}

/** Writes a system to Matrix Market files: matrix, right-hand side, coordinates. */
export async function writeSystem(
	{ matrix, b, places }: PlanSystem,
	[matrixPath, rhsPath, coordsPath]: readonly [string, string, string]
): Promise<void> {
	await writeMatrix(matrixPath, matrix);
	await writeColumns(rhsPath, [b]);
	await writeColumns(coordsPath, [places.x, places.y]);
}

export async function systemOfFiles(
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
