import { LuDecomposition, Matrix } from 'ml-matrix';
import type { Circuit } from './circuit.ts';
import { LOOP_HOLDING } from './evaluation.ts';
import type { GridFactors } from './grid-factors.ts';
import { isFlat, PIECE_DROPOUT, PIECE_REGULATING } from './regulator-law.ts';

/** A step of all unknowns. */
export interface Step {
	/** Per node, V; 0 at held nodes. */
	readonly voltage: Float64Array;
	/** Per sense loop, V. */
	readonly correction: Float64Array;
}

/**
 * Slope that a flat unit is given, as a fraction of its regulating slope, where every unit of a
 * connected part is flat: it says which way the floating part drifts, and how far is left to the
 * step's length.
 */
export const LEAK_FRACTION = 1e-4;

/** The linear equations of one set of pieces, loads left out, ready for any right-hand side. */
export interface PortSolver {
	/**
	 * Solves for the step that takes `mismatchA` (per node, A) and `senseV` (per loop: what the mean
	 * has to rise, or the correction itself for a loop that stands at an end) to zero.
	 */
	solve(mismatchA: Float64Array, senseV: Float64Array): Step;
	/** Loops that no unit follows: their correction steps, their mean cannot. */
	readonly powerless: readonly boolean[];
}

/**
 * The regulators as a small-rank change of the kept factors. The factor of a regulated net holds
 * the slope 1 / outputOhm of each enabled unit, so a regulating unit needs nothing; every other unit
 * is one unknown z, its current on top of that slope's, and every loop one unknown u. With Z the
 * factor's answers at the ports, the equations of z and u are dense and of that small order:
 *
 * - dv(output) = y + Z z + q u, where y answers the right-hand side and q all regulating units' 1 / outputOhm
 * - flat unit: z = (1 - leak) dv(output) / outputOhm
 * - fully on: z = dv(output) / outputOhm + (dv(input) - dv(output)) / onOhm
 * - holding loop: sum of weight dv(point) = error
 *
 * Ground comes first (only loads and quiescent currents flow into it), then the regulated nets, then
 * the input nets, which give what the units take.
 *
 * @param leak per unit, 0 or LEAK_FRACTION
 * @returns null where these equations are singular
 */
export function createPortSolver(
	circuit: Circuit,
	grid: GridFactors,
	piece: Uint8Array,
	leak: Float64Array,
	loop: Int8Array
): PortSolver | null {
	const { regulators: units, senses, network } = circuit;
	const count = network.nodes.count;
	const netsOf = (kind: 'input' | 'regulated' | 'ground') =>
		network.nets.flatMap((net, index) => (net.kind === kind ? [index] : []));
	const [groundNets, regulatedNets, inputNets] = [
		netsOf('ground'),
		netsOf('regulated'),
		netsOf('input')
	];
	const conductance = units.outputOhm.map((ohm) => 1 / ohm);
	const on = units.onOhm.map((ohm) => 1 / ohm);
	const netOfNode = network.nodes.net;

	// Units with an unknown z, and their columns of Z on the output net and on the input net.
	const changed: number[] = [];
	for (let k = 0; k < units.count; k++) if (piece[k] !== PIECE_REGULATING) changed.push(k);
	const outputColumn = changed.map((k) => grid.column(units.net[k], units.outputNode[k]));
	const inputColumn = changed.map((k) =>
		piece[k] === PIECE_DROPOUT
			? grid.column(netOfNode[units.inputNode[k]], units.inputNode[k])
			: null
	);
	const slotOf = new Int32Array(units.count).fill(-1);
	changed.forEach((k, slot) => (slotOf[k] = slot));

	// q of every loop: the net's answer to one volt more on each of its regulating set points.
	const lift = senses.map((sense, s) => {
		const right = new Float64Array(count);
		for (let k = 0; k < units.count; k++) {
			if (units.sense[k] === s && piece[k] === PIECE_REGULATING) {
				right[units.outputNode[k]] += conductance[k];
			}
		}
		const answer = new Float64Array(count);
		grid.solve(sense.net, right, answer);
		return answer;
	});
	const powerless = senses.map((sense, s) => {
		let followed = 0;
		sense.node.forEach((node, point) => (followed += sense.weight[point] * lift[s][node]));
		return !(followed > 1e-9);
	});
	const holding = senses.map((_, s) => loop[s] === LOOP_HOLDING && !powerless[s]);

	const order = changed.length + senses.length;
	const uColumn = (s: number) => changed.length + s;
	/** Writes `scale` times the coefficients of dv(node) on a regulated net into a row. */
	function addVoltage(row: Float64Array, net: number, node: number, scale: number): void {
		for (let slot = 0; slot < changed.length; slot++) {
			if (units.net[changed[slot]] === net) row[slot] += scale * outputColumn[slot].at(node);
		}
		senses.forEach((sense, s) => {
			if (sense.net === net) row[uColumn(s)] += scale * lift[s][node];
		});
	}
	/** The same for the current of unit m. */
	function addCurrent(row: Float64Array, m: number, scale: number): void {
		const slope = piece[m] === PIECE_REGULATING || piece[m] === PIECE_DROPOUT ? 1 : leak[m];
		if (slope !== 0) {
			addVoltage(row, units.net[m], units.outputNode[m], -scale * slope * conductance[m]);
		}
		if (piece[m] === PIECE_REGULATING && units.sense[m] >= 0) {
			row[uColumn(units.sense[m])] += scale * conductance[m];
		}
		if (piece[m] === PIECE_DROPOUT) row[slotOf[m]] += scale;
	}

	/** Units that take their current from one input net. */
	const unitsByInput = new Map<number, number[]>();
	for (let k = 0; k < units.count; k++) {
		if (units.inputNode[k] < 0) continue;
		const net = netOfNode[units.inputNode[k]];
		unitsByInput.set(net, [...(unitsByInput.get(net) ?? []), k]);
	}

	const rows: Float64Array[] = [];
	changed.forEach((k, slot) => {
		const row = new Float64Array(order);
		row[slot] += 1;
		const column = inputColumn[slot];
		if (column === null) {
			addVoltage(row, units.net[k], units.outputNode[k], -(1 - leak[k]) * conductance[k]);
		} else {
			addVoltage(row, units.net[k], units.outputNode[k], on[k] - conductance[k]);
			const shared = unitsByInput.get(netOfNode[units.inputNode[k]]) ?? [];
			for (const m of shared) addCurrent(row, m, on[k] * column.at(units.inputNode[m]));
		}
		rows.push(row);
	});
	senses.forEach((sense, s) => {
		const row = new Float64Array(order);
		if (holding[s]) {
			sense.node.forEach((node, point) => addVoltage(row, sense.net, node, sense.weight[point]));
		} else {
			row[uColumn(s)] = 1;
		}
		rows.push(row);
	});
	const lu = order === 0 ? null : new LuDecomposition(new Matrix(rows.map((row) => [...row])));
	if (lu !== null && lu.isSingular()) return null;

	function solve(mismatchA: Float64Array, senseV: Float64Array): Step {
		const voltage = new Float64Array(count);
		const correction = new Float64Array(senses.length);
		for (const net of groundNets) grid.solve(net, mismatchA, voltage);
		const reference = (k: number) =>
			units.referenceNode[k] < 0 ? 0 : voltage[units.referenceNode[k]];

		const right = Float64Array.from(mismatchA);
		for (let k = 0; k < units.count; k++) {
			if (piece[k] === PIECE_REGULATING)
				right[units.outputNode[k]] += conductance[k] * reference(k);
		}
		// y, kept in `voltage` until z and u are known.
		for (const net of regulatedNets) grid.solve(net, right, voltage);
		if (lu !== null) {
			const small = smallRight(mismatchA, senseV, voltage, reference);
			const answer = lu.solve(Matrix.columnVector(small)).to1DArray();
			const touched = new Set<number>();
			changed.forEach((k, slot) => {
				right[units.outputNode[k]] += answer[slot];
				touched.add(units.net[k]);
			});
			senses.forEach((sense, s) => {
				correction[s] = answer[uColumn(s)];
				touched.add(sense.net);
				for (let k = 0; k < units.count; k++) {
					if (units.sense[k] === s && piece[k] === PIECE_REGULATING) {
						right[units.outputNode[k]] += conductance[k] * correction[s];
					}
				}
			});
			for (const net of touched) grid.solve(net, right, voltage);
			for (let k = 0; k < units.count; k++) {
				if (units.inputNode[k] < 0) continue;
				right[units.inputNode[k]] -= currentStep(k, voltage, correction, reference, answer);
			}
		} else {
			for (let k = 0; k < units.count; k++) {
				if (units.inputNode[k] < 0) continue;
				right[units.inputNode[k]] -= currentStep(k, voltage, correction, reference, []);
			}
		}
		for (const net of inputNets) grid.solve(net, right, voltage);
		return { voltage, correction };
	}

	/** Change of unit k's current once its output's voltage is known. */
	function currentStep(
		k: number,
		voltage: Float64Array,
		correction: Float64Array,
		reference: (k: number) => number,
		z: readonly number[]
	): number {
		const out = voltage[units.outputNode[k]];
		if (piece[k] === PIECE_REGULATING) {
			const shift = units.sense[k] < 0 ? 0 : correction[units.sense[k]];
			return conductance[k] * (reference(k) + shift - out);
		}
		if (piece[k] === PIECE_DROPOUT) return z[slotOf[k]] - conductance[k] * out;
		return -leak[k] * conductance[k] * out;
	}

	/** Right-hand sides of the small equations, from y (in `answered` on the regulated nets). */
	function smallRight(
		mismatchA: Float64Array,
		senseV: Float64Array,
		answered: Float64Array,
		reference: (k: number) => number
	): Float64Array {
		const small = new Float64Array(order);
		const inputAnswer = new Float64Array(count);
		const solvedInputs = new Set<number>();
		changed.forEach((k, slot) => {
			const out = answered[units.outputNode[k]];
			const column = inputColumn[slot];
			if (column === null) {
				small[slot] = isFlat(piece[k]) ? (1 - leak[k]) * conductance[k] * out : 0;
				return;
			}
			const net = netOfNode[units.inputNode[k]];
			if (!solvedInputs.has(net)) {
				solvedInputs.add(net);
				grid.solve(net, mismatchA, inputAnswer);
			}
			let dInput = inputAnswer[units.inputNode[k]];
			for (const m of unitsByInput.get(net) ?? []) {
				const follow = piece[m] === PIECE_REGULATING || piece[m] === PIECE_DROPOUT ? 1 : leak[m];
				const ground = piece[m] === PIECE_REGULATING ? reference(m) : 0;
				const base = conductance[m] * (ground - follow * answered[units.outputNode[m]]);
				dInput -= column.at(units.inputNode[m]) * base;
			}
			small[slot] = (conductance[k] - on[k]) * out + on[k] * dInput;
		});
		senses.forEach((sense, s) => {
			small[uColumn(s)] = senseV[s];
			if (!holding[s]) return;
			sense.node.forEach((node, point) => {
				const ground = sense.groundNode[point];
				const seen = answered[node] - (ground < 0 ? 0 : answered[ground]);
				small[uColumn(s)] -= sense.weight[point] * seen;
			});
		});
		return small;
	}

	return { solve, powerless };
}
