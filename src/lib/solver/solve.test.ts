import { Matrix, solve as solveDense } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
	cellOf,
	feedAt,
	ladderPlan,
	loadAt,
	planOf,
	rectangle,
	regulatorAt
} from '../../../tests/support/plans.ts';
import { meshOf, outcomeOf, solved } from '../../../tests/support/solving.ts';
import { resistancesAt, type Network } from '#lib/mesh/index.ts';
import type { Floorplan, FloorplanInput } from '#lib/floorplan/index.ts';
import { buildCircuit } from './circuit.ts';
import { evaluate } from './evaluation.ts';
import { createGridCache } from './grid-cache.ts';
import { createPortSolver } from './port-solver.ts';
import { proveAnswer, stateOf } from './proof.ts';
import {
	PIECE_DROPOUT,
	PIECE_IDLE,
	PIECE_LIMITED,
	PIECE_REGULATING,
	PIECE_STARVED
} from './regulator-law.ts';
import { solveNewton, startingPoint } from './start.ts';
import { solveOperatingPoint } from './solve.ts';

/** A rail, its input and its ground, one strap each way per net, with units of every kind. */
function threeNets(parts: Partial<FloorplanInput> = {}): Floorplan {
	const straps = ['vdd', 'vin', 'gnd'].flatMap((net, k) => [
		{ id: `${net}.h`, net, layer: 'm1', pitchUm: 20, widthUm: 1, offsetUm: 4 * k },
		{ id: `${net}.v`, net, layer: 'm2', pitchUm: 20, widthUm: 1, offsetUm: 4 * k }
	]);
	return planOf({
		die: { outline: rectangle(0, 0, 70, 70) },
		layers: [
			{ id: 'm1', direction: 'horizontal', sheetOhm: 0.02 },
			{ id: 'm2', direction: 'vertical', sheetOhm: 0.03 }
		],
		vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: 0.05, cutsPerUm2: 0 }],
		nets: [
			{
				id: 'vdd',
				kind: 'regulated',
				volts: 1,
				senseLoop: {
					points: [
						{ xUm: 20, yUm: 20 },
						{ xUm: 60, yUm: 40, weight: 2 }
					],
					rangeV: 0.2
				}
			},
			{ id: 'vin', kind: 'input', volts: 1.3 },
			{ id: 'gnd', kind: 'ground', volts: 0 }
		],
		straps,
		feeds: [
			feedAt('in', 'vin', 4, 4, 0.05),
			feedAt('in2', 'vin', 64, 64, 0),
			feedAt('out', 'gnd', 8, 8, 0),
			feedAt('out2', 'gnd', 68, 68, 0.02)
		],
		cells: [cellOf('unit', { outputOhm: 0.1, onOhm: 0.2, maxA: 0.4, quiescentA: 0.001 })],
		regulators: [
			[0, 0],
			[60, 0],
			[0, 60],
			[60, 60],
			[20, 40]
		].map(([x, y], k) =>
			regulatorAt(`r${k}`, 'vdd', x, y, { input: k === 4 ? null : 'vin', offsetV: 0.004 * (k - 2) })
		),
		blocks: [
			loadAt('b0', 'vdd', 40, 40, 0.3),
			loadAt('b1', 'vdd', 20, 20, 0.2, { voltageExponent: 1 }),
			loadAt('b2', 'vdd', 60, 20, 0.1, { voltageExponent: -1 })
		],
		...parts
	});
}

function circuitOf(plan: Floorplan, network: Network) {
	const scaled = resistancesAt(network, plan, plan.corners[0]);
	if (scaled.status !== 'scaled') throw new Error('the corner was refused');
	return buildCircuit(plan, network, plan.modes[0], plan.corners[0], scaled.ohm);
}

function gridOf(plan: Floorplan) {
	const network = meshOf(plan);
	const circuit = circuitOf(plan, network);
	const factored = createGridCache(network).factors(circuit);
	if (factored.status !== 'factored') throw new Error('the grid was not factored');
	return { network, circuit, grid: factored.grid };
}

describe('createPortSolver', () => {
	const cases = [
		['all regulating', [0, 0, 0, 0, 0]],
		['limited and idle', [PIECE_LIMITED, PIECE_IDLE, 0, 0, 0]],
		['fully on beside regulating', [PIECE_DROPOUT, 0, PIECE_DROPOUT, 0, 0]],
		['every piece', [PIECE_DROPOUT, PIECE_IDLE, PIECE_STARVED, PIECE_REGULATING, PIECE_LIMITED]]
	] as const;

	it.each(cases.flatMap(([name, piece]) => [0, 0.01].map((leak) => ({ name, piece, leak }))))(
		'$name, leak $leak: the same step as a dense solve of all equations',
		({ piece, leak }) => {
			const plan = threeNets();
			const { network, circuit, grid } = gridOf(plan);
			const { count } = network.nodes;
			const units = circuit.regulators;
			const leaks = new Float64Array(units.count).fill(leak);
			const solver = createPortSolver(
				circuit,
				grid,
				Uint8Array.from(piece),
				leaks,
				Int8Array.of(0)
			);
			if (solver === null) throw new Error('the equations are singular');

			// The whole Jacobian, node by node from the laws; the last unknown is the loop's correction.
			const dense = Matrix.eye(count + 1, count + 1);
			for (let i = 0; i <= count; i++) dense.set(i, i, circuit.held[i] === 1 ? 1 : 0);
			const add = (row: number, column: number, value: number) => {
				if (row < 0 || column < 0 || circuit.held[row] === 1) return;
				dense.set(row, column, dense.get(row, column) + value);
			};
			for (let r = 0; r < network.resistors.count; r++) {
				const ends = [network.resistors.from[r], network.resistors.to[r]];
				for (const [a, b] of [ends, [ends[1], ends[0]]]) {
					add(a, a, 1 / circuit.ohm[r]);
					add(a, b, -1 / circuit.ohm[r]);
				}
			}
			for (let f = 0; f < circuit.feeds.count; f++) {
				const node = circuit.feeds.node[f];
				if (circuit.feeds.seriesOhm[f] > 0) add(node, node, 1 / circuit.feeds.seriesOhm[f]);
			}
			for (let k = 0; k < units.count; k++) {
				const [out, input, reference] = [
					units.outputNode[k],
					units.inputNode[k],
					units.referenceNode[k]
				];
				const weight = { [PIECE_REGULATING]: 1, [PIECE_LIMITED]: leak, [PIECE_IDLE]: leak }[
					piece[k] as number
				];
				const through = { [PIECE_DROPOUT]: 1, [PIECE_STARVED]: leak }[piece[k] as number];
				// Into the output, out of the input.
				for (const [row, sign] of [
					[out, -1],
					[input, 1]
				]) {
					const g = (sign * (weight ?? 0)) / units.outputOhm[k];
					add(row, out, -g);
					add(row, reference, g);
					add(row, count, g);
					const on = (sign * (through ?? 0)) / units.onOhm[k];
					add(row, out, -on);
					add(row, input, on);
				}
			}
			const [sense] = circuit.senses;
			sense.node.forEach((node, point) => {
				add(count, node, sense.weight[point]);
				add(count, sense.groundNode[point], -sense.weight[point]);
			});

			const mismatch = Float64Array.from({ length: count }, (_, node) =>
				circuit.held[node] === 1 ? 0 : Math.sin(7 * node + 1)
			);
			const step = solver.solve(mismatch, Float64Array.of(0.003));
			const right = Matrix.columnVector([...mismatch, 0.003]);
			const exact = solveDense(dense, right).to1DArray();
			expect(step.correction[0]).toBeCloseTo(exact[count], 9);
			step.voltage.forEach((volts, node) => expect(volts).toBeCloseTo(exact[node], 9));
		}
	);
});

describe('solveOperatingPoint', () => {
	it('proves its answer on a plan with an input, a ground, a loop and bent loads', () => {
		const { point, result } = solved(threeNets());
		expect(point.proof.kclRelative).toBeLessThan(1e-11);
		expect(point.proof.powerRelative).toBeLessThan(1e-11);
		expect(point.proof.statesConsistent).toBe(true);
		expect(point.statistics.residual).toBeLessThan(1e-12);
		expect(point.sense[0].state).toBe('holding');
		expect(Math.abs(point.sense[0].errorV)).toBeLessThan(1e-11);
		expect(result.power.inputW).toBeCloseTo(
			result.power.loadW + result.power.regulatorW + result.power.gridW + result.power.feedW,
			12
		);
	});

	it('one piece at a time leads to the same answer', () => {
		for (const amps of [0.1, 0.4, 0.7, 0.9]) {
			const plan = threeNets({
				blocks: [loadAt('b0', 'vdd', 40, 40, amps), loadAt('b1', 'vdd', 0, 0, amps)]
			});
			const { circuit, grid } = gridOf(plan);
			const start = startingPoint(circuit, new Set());
			const plain = solveNewton(circuit, grid, start);
			const pivots = solveNewton(circuit, grid, start, { pivotOnly: true });
			expect([plain.status, pivots.status]).toEqual(['converged', 'converged']);
			plain.unknowns.voltage.forEach((volts, node) =>
				expect(pivots.unknowns.voltage[node]).toBeCloseTo(volts, 9)
			);
			expect([...pivots.evaluation.piece]).toEqual([...plain.evaluation.piece]);
		}
	});

	it('keeps the ground part and the net part of a drop apart', () => {
		const { result } = solved(threeNets());
		const [block] = result.blocks;
		expect(block.groundRiseV).toBeGreaterThan(0);
		expect(block.netDropV + block.groundRiseV).toBeCloseTo(block.worstDropV, 14);
		expect(block.minV).toBeCloseTo(1 - block.worstDropV, 14);
	});

	it('a quiet ground reference lets the ground rise through, a local one follows it', () => {
		const rail = threeNets().nets;
		const at = (groundReference: 'local' | 'quiet') =>
			solved(
				threeNets({
					nets: rail.map((net) => ({ ...net, senseLoop: undefined, groundReference }))
				})
			);
		const [quiet, local] = [at('quiet'), at('local')];
		expect(quiet.result.blocks[0].worstDropV).toBeGreaterThan(local.result.blocks[0].worstDropV);
	});

	it('no load at all: nothing flows, and the units that cannot give stand idle', () => {
		const plan = ladderPlan(
			{},
			{
				regulators: [
					regulatorAt('low', 'vdd', 0, 0, { offsetV: -0.01 }),
					regulatorAt('high', 'vdd', 100, 0, { offsetV: 0.01 })
				]
			}
		);
		const answer = solved(plan);
		expect(answer.stateOf('low')).toBe('idle');
		expect(answer.stateOf('high')).toBe('idle');
		expect(answer.voltageAt('vdd', 50, 0)).toBeCloseTo(1.01, 9);
		expect(answer.point.proof.statesConsistent).toBe(true);
	});

	it('with a tiny output resistance and large offsets one unit carries all', () => {
		const plan = ladderPlan(
			{ totalOhm: 1e-3 },
			{
				cells: [cellOf('unit', { outputOhm: 1e-5, maxA: 5 })],
				regulators: [0, 50, 100].map((xUm, k) =>
					regulatorAt(`r${k}`, 'vdd', xUm, 0, { offsetV: k === 1 ? 0.05 : 0 })
				),
				blocks: [loadAt('load', 'vdd', 50, 0, 2)]
			}
		);
		const answer = solved(plan);
		expect(answer.ampsOf('r1')).toBeCloseTo(2, 9);
		expect(answer.stateOf('r0')).toBe('idle');
		expect(answer.stateOf('r2')).toBe('idle');
		expect(answer.result.nets[0].sharingSpread).toBeCloseTo(3, 9);
	});

	it('sinking units take a negative load', () => {
		const plan = ladderPlan(
			{},
			{
				cells: [cellOf('unit', { outputOhm: 0.05, sinkA: 0.3 })],
				regulators: [regulatorAt('r', 'vdd', 50, 0)],
				blocks: [loadAt('source', 'vdd', 50, 0, -0.2)]
			}
		);
		const answer = solved(plan);
		expect(answer.ampsOf('r')).toBeCloseTo(-0.2, 11);
		expect(answer.stateOf('r')).toBe('regulating');
	});

	it('exactly the rated current of all units is still an operating point', () => {
		const plan = ladderPlan(
			{},
			{
				cells: [cellOf('unit', { maxA: 0.1 })],
				regulators: [regulatorAt('a', 'vdd', 50, 0), regulatorAt('b', 'vdd', 50, 0)],
				blocks: [loadAt('load', 'vdd', 50, 0, 0.2)]
			}
		);
		const answer = solved(plan);
		expect(answer.stateOf('a')).toBe('limited');
		expect(answer.stateOf('b')).toBe('limited');
	});

	it('a starved rail is refused with the current that the input lets through', () => {
		const plan = threeNets({
			nets: threeNets().nets.map((net) => ({
				...net,
				senseLoop: undefined,
				...(net.id === 'vin' ? { volts: 0.3 } : {})
			})),
			regulators: threeNets().regulators.filter(({ input }) => input !== null),
			cells: [cellOf('unit', { maxA: 5, onOhm: 0.2 })],
			blocks: [loadAt('b', 'vdd', 40, 40, 10)]
		});
		const outcome = outcomeOf(plan, meshOf(plan));
		expect(outcome.status).toBe('unsolvable');
		if (outcome.status !== 'unsolvable') return;
		expect(outcome.problems[0].path).toBe('nets (vdd)');
		expect(outcome.problems[0].wantedA).toBeCloseTo(10, 12);
		expect(outcome.problems[0].availableA).toBeLessThan(10);
	});

	it('a loop whose units are all limited goes to the end of its range and says so', () => {
		const plan = ladderPlan(
			{ totalOhm: 1 },
			{
				nets: [
					{
						id: 'vdd',
						kind: 'regulated',
						volts: 1,
						senseLoop: { points: [{ xUm: 100, yUm: 0 }], rangeV: 0.01 }
					}
				],
				cells: [cellOf('unit', { maxA: 0.1, outputOhm: 0.01 })],
				regulators: [regulatorAt('r', 'vdd', 0, 0)],
				// The resistor behind the strap takes what the unit gives: the level is not free.
				blocks: [loadAt('load', 'vdd', 100, 0, 0.5, { voltageExponent: 1 })]
			}
		);
		const answer = solved(plan);
		expect(answer.stateOf('r')).toBe('limited');
		expect(answer.point.sense[0].correctionV).toBeCloseTo(0.01, 12);
		expect(answer.result.warnings.map(({ code }) => code)).toContain('sense-powerless');
	});

	it('modes of one corner share a factor and do not change each other', () => {
		const plan = threeNets({
			modes: [{ id: 'default' }, { id: 'low', inputVolts: { vin: 1.02 } }]
		});
		const network = meshOf(plan);
		const cache = createGridCache(network);
		const now = () => 0;
		const low = solveOperatingPoint(plan, network, { mode: 'low', now, cache });
		const shared = solveOperatingPoint(plan, network, { mode: 'default', now, cache });
		const fresh = solveOperatingPoint(plan, network, { mode: 'default', now });
		if (shared.status !== 'solved' || fresh.status !== 'solved' || low.status !== 'solved') {
			throw new Error('a mode was not solved');
		}
		expect(shared.point.voltage).toEqual(fresh.point.voltage);
		const vin = network.nets.findIndex(({ id }) => id === 'vin');
		expect(low.point.nominalV[vin]).toBe(1.02);
	});

	it('reports its phases and stops when asked', () => {
		const plan = threeNets();
		const network = meshOf(plan);
		const phases: string[] = [];
		let asked = 0;
		const outcome = solveOperatingPoint(plan, network, {
			now: () => 0,
			onProgress: ({ phase }) => phases.push(phase),
			shouldStop: () => ++asked > 3
		});
		expect(outcome.status).toBe('stopped');
		expect(phases.slice(0, 3)).toEqual(['setup', 'factor', 'solve']);
	});
});

describe('proveAnswer', () => {
	const plan = threeNets();
	const { circuit, grid } = gridOf(plan);
	const newton = solveNewton(circuit, grid, startingPoint(circuit, new Set()));
	const bare = {
		voltage: newton.unknowns.voltage,
		correctionV: newton.unknowns.correction,
		regulatorAmps: newton.evaluation.amps,
		regulatorStates: [],
		loadAmps: newton.evaluation.loadAmps,
		// Every feed has a node here; what its held node gives is not needed by these tests.
		feedAmps: new Float64Array(circuit.feeds.count)
	};
	const good = {
		...bare,
		regulatorStates: Array.from(bare.regulatorAmps, (_, k) => stateOf(circuit, bare, k))
	};

	it('a shifted voltage shows in the mismatch and in the states', () => {
		const regulating = good.regulatorStates.indexOf('regulating');
		const shifted = circuit.regulators.outputNode[regulating];
		const voltage = good.voltage.map((volts, node) => (node === shifted ? volts + 1e-3 : volts));
		const proof = proveAnswer(circuit, { ...good, voltage }, 1);
		expect(proof.kclMaxA).toBeGreaterThan(1e-3);
		expect(proof.statesConsistent).toBe(false);
	});

	it('a wrong state name shows', () => {
		expect(proveAnswer(circuit, good, 1).statesConsistent).toBe(true);
		const regulatorStates = good.regulatorStates.map(() => 'dropout' as const);
		expect(proveAnswer(circuit, { ...good, regulatorStates }, 1).statesConsistent).toBe(false);
	});

	it('evaluate agrees that nothing is left over', () => {
		expect(evaluate(circuit, newton.unknowns, 0).maxMismatchA).toBeLessThan(1e-11);
	});
});
