/**
 * Times what follows a hand that edits: a regulator that is moved, a block that is dragged, a strap
 * that gets wider; and the studies over all regulators. Conductance edits use the kept factor.
 */
import { seededRandom } from '#lib/demo/index.ts';
import {
	assembleLaplacian,
	createEditableSolution,
	createPorts,
	factorise,
	relativeResidual,
	solveWith,
	type ConductanceEdit
} from '#lib/sparse/index.ts';
import type { Solved } from './bench-solve.ts';
import { peakMb, spreadOf, type Spread } from './bench-statistics.ts';
import { seconds, type PlanSystem } from './bench-system.ts';

const SEED = 77;
const MILLISECONDS = 1000;
const MISMATCH_SAMPLES = 1000;

/** Times each call, ms; the first calls, in which engines still compile, are not counted. */
function repeat(times: number, work: (round: number) => void, warmUp = 3): Spread {
	const spent: number[] = [];
	for (let round = 0; round < times + warmUp; round++) {
		const begin = seconds();
		work(round);
		if (round >= warmUp) spent.push((seconds() - begin) * MILLISECONDS);
	}
	return spreadOf(spent);
}

/** One call, ms. */
function once(work: () => void): number {
	const begin = seconds();
	work();
	return (seconds() - begin) * MILLISECONDS;
}

/** Times edits of one regulator, one block and one strap; residuals are of the edited systems. */
export function timeEdits(system: PlanSystem, solved: Solved, repeats: number) {
	const { matrix, b, plan, conductance, tie, regulatorNode, regulatorSiemens } = system;
	const random = seededRandom(SEED);
	const anyNode = () => Math.floor(random() * matrix.n);
	let { factor } = solved;
	const regulators = regulatorNode.length;
	// The last port is where the moved regulator goes.
	const ports = createPorts(factor, [...regulatorNode, anyNode()]);
	const editable = createEditableSolution(factor, ports, b);
	let moved = { from: 0, to: 0, x: editable.solution };
	const move = (): ConductanceEdit[] => {
		const from = Math.floor(random() * regulators);
		ports.move(regulators, anyNode());
		moved = { ...moved, from, to: ports.rows[regulators] };
		return [
			{ place: [[from, 1]], siemens: -regulatorSiemens },
			{ place: [[regulators, 1]], siemens: regulatorSiemens }
		];
	};
	let currents = 0;
	const moveCurrents = repeat(repeats, () => {
		const answer = editable.edited(move());
		for (let k = 0; k <= regulators; k++) currents += answer?.at(k) ?? 0;
	});
	const moveMap = repeat(repeats, () => {
		const answer = editable.edited(move());
		if (answer) moved = { ...moved, x: answer.all() };
	});
	const movedTie = tie.slice();
	movedTie[regulatorNode[moved.from]] -= regulatorSiemens;
	movedTie[moved.to] += regulatorSiemens;
	const moveResidual = relativeResidual(assembleLaplacian(plan, conductance, movedTie), moved.x, b);

	const { blockNode, blockAmps } = system;
	const dragged = b.slice();
	const loadMap = repeat(repeats, (round) => {
		dragged.set(b);
		blockNode.forEach((node, k) => {
			dragged[node] -= blockAmps[k];
			dragged[(node + 1 + round) % matrix.n] += blockAmps[k];
		});
		solveWith(factor, dragged);
	});

	const edited = conductance.slice();
	let strapMatrix = matrix;
	let strapX = editable.solution;
	const strapMap = repeat(Math.min(repeats, 20), (round) => {
		for (let edge = 1000 * round; edge < 1000 * round + 500 && edge < edited.length; edge++) {
			edited[edge] *= 2;
		}
		strapMatrix = assembleLaplacian(plan, edited, tie);
		const result = factorise(factor.symbolic, strapMatrix, {
			replaces: factor,
			secondThread: factor.team?.thread
		});
		if (result.status === 'factorised') factor = result.factor;
		strapX = solveWith(factor, b);
	});
	return {
		ports: regulators,
		ms: { moveCurrents, moveMap, loadMap, strapMap },
		residual: Math.max(moveResidual, relativeResidual(strapMatrix, strapX, b)),
		checksum: currents,
		peakMb: peakMb()
	};
}

/** Times the studies over all regulators on one factor. */
export function timeStudies({ b, regulatorNode, regulatorSiemens }: PlanSystem, solved: Solved) {
	const { factor } = solved;
	const count = regulatorNode.length;
	const random = seededRandom(SEED);
	const off = (k: number): ConductanceEdit => ({ place: [[k, 1]], siemens: -regulatorSiemens });
	let ports = createPorts(factor, []);
	const portMatrix = once(() => {
		ports = createPorts(factor, regulatorNode);
		ports.all();
	});
	const editable = createEditableSolution(factor, ports, b);
	const inverse = ports.all();
	const volts = Float64Array.from(regulatorNode, (node) => editable.solution[node]);
	let checksum = 0;
	/** Sum of the volts at all regulators after those at a and b went off: closed form in two unknowns. */
	const outage = (a: number, b: number) => {
		const ownA = inverse[a * count + a] - 1 / regulatorSiemens;
		const ownB = inverse[b * count + b] - 1 / regulatorSiemens;
		const mutual = a === b ? 0 : inverse[a * count + b];
		const determinant = ownA * ownB - mutual * mutual;
		const takenA = (ownB * volts[a] - mutual * volts[b]) / determinant;
		const takenB = a === b ? 0 : (ownA * volts[b] - mutual * volts[a]) / determinant;
		let sum = 0;
		for (let k = 0; k < count; k++) {
			sum += volts[k] - inverse[a * count + k] * takenA - inverse[b * count + k] * takenB;
		}
		return sum;
	};
	const singleCurrents = once(() => {
		for (let a = 0; a < count; a++) checksum += outage(a, a);
	});
	const pairCurrents = once(() => {
		for (let a = 0; a < count; a++) for (let b = 0; b < a; b++) checksum += outage(a, b);
	});
	const singleMaps = once(() => {
		const cases = Array.from({ length: count }, (_, k) => [off(k)]);
		editable.eachEdited(cases, (_index, x) => (checksum += x[0]));
	});
	// Offsets move the set points, so that they are sources at the regulators: the map is linear in
	// them, and every sample costs one backward substitution.
	const mismatchMaps = once(() => {
		const offsets = new Float64Array(count);
		editable.eachInjected(
			MISMATCH_SAMPLES,
			() => {
				for (let k = 0; k < count; k++) offsets[k] = (random() - 0.5) * 1e-2 * regulatorSiemens;
				return offsets;
			},
			(_index, x) => (checksum += x[0])
		);
	});
	return {
		ports: count,
		ms: { portMatrix, singleCurrents, pairCurrents, singleMaps, mismatchMaps },
		mismatchSamples: MISMATCH_SAMPLES,
		checksum,
		peakMb: peakMb()
	};
}
