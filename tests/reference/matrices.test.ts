/**
 * The nodal matrices of the demo and of ten generated plans, solved by the product and by a general
 * numerical package (SciPy's sparse direct solver, from Debian's packages).
 */
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { makeDemoFloorplan } from '#lib/demo/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { resistancesAt } from '#lib/mesh/index.ts';
import {
	analyse,
	assembleLaplacian,
	factorise,
	norm2,
	orderNestedDissection,
	planAssembly,
	relativeResidual,
	solveWith,
	type SymmetricMatrix
} from '#lib/sparse/index.ts';
import { readColumns, writeColumns, writeMatrix } from '../../src/cli/matrix-market.ts';
import { runPython } from '../support/python.ts';
import { randomPlans } from '../support/random-plan.ts';
import { meshOf } from '../support/solving.ts';

let folder: string;
beforeAll(async () => {
	folder = await mkdtemp(join(tmpdir(), 'manyweir-matrices-'));
});
afterAll(() => rm(folder, { recursive: true }));

/** Holds a node with a conductance far above the grid's, where a feed has no resistance. */
const HELD_SIEMENS = 1e6;

/** All nets of a plan: straps and vias, feeds and enabled regulators as ties, loads as right-hand side. */
function systemOf(floorplan: Floorplan) {
	const network = meshOf(floorplan);
	const resistances = resistancesAt(network, floorplan, floorplan.corners[0]);
	if (resistances.status === 'refused') throw new Error(JSON.stringify(resistances.problems));
	const { nodes, resistors, feeds, regulators, loads } = network;
	const tie = new Float64Array(nodes.count);
	feeds.node.forEach((node, f) => {
		if (node >= 0) tie[node] += feeds.seriesOhm[f] > 0 ? 1 / feeds.seriesOhm[f] : HELD_SIEMENS;
	});
	const ohms = new Map(floorplan.cells.map(({ id, outputOhm }) => [id, outputOhm]));
	regulators.outputNode.forEach((node, k) => {
		const { enabled, cell } = floorplan.regulators[k];
		if (node >= 0 && enabled) tie[node] += 1 / (ohms.get(cell) ?? NaN);
	});
	const plan = planAssembly(nodes.count, resistors.from, resistors.to);
	const conductance = resistances.ohm.map((ohm) => 1 / ohm);
	const b = new Float64Array(nodes.count);
	for (let load = 0; load < loads.count; load++) b[loads.node[load]] += loads.share[load];
	return { matrix: assembleLaplacian(plan, conductance, tie), b, x: nodes.xNm, y: nodes.yNm };
}

function solve(matrix: SymmetricMatrix, b: Float64Array, x: Int32Array, y: Int32Array) {
	const result = factorise(analyse(matrix, orderNestedDissection(matrix, x, y)), matrix);
	if (result.status !== 'factorised') throw new Error(result.status);
	return solveWith(result.factor, b);
}

const generated = fc.sample(randomPlans([0]), { numRuns: 10, seed: 31607 });
const plans: [string, Floorplan][] = [
	['the demo', makeDemoFloorplan()],
	...generated.map((plan, k): [string, Floorplan] => [`generated plan ${k + 1}`, plan])
];

test.each(plans)(
	'%s: as exact as the general package, and the same solution',
	async (_name, floorplan) => {
		const { matrix, b, x, y } = systemOf(floorplan);
		const own = solve(matrix, b, x, y);
		const [matrixPath, rhsPath, outPath] = ['A.mtx', 'b.mtx', 'x.mtx'].map((name) =>
			join(folder, name)
		);
		await writeMatrix(matrixPath, matrix);
		await writeColumns(rhsPath, [b]);
		runPython('tests/reference/solve_matrix.py', matrixPath, rhsPath, outPath);
		const [general] = await readColumns(outPath, 1);
		const residuals = [own, general].map((solution) => relativeResidual(matrix, solution, b));
		expect(residuals[0]).toBeLessThan(1e-11);
		expect(residuals[0]).toBeLessThan(Math.max(100 * residuals[1], 1e-12));
		expect(norm2(own.map((value, i) => value - general[i])) / norm2(general)).toBeLessThan(1e-8);
	}
);
