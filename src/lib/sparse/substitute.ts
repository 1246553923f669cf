import type { SymbolicFactor } from './analyse.ts';
import { bindCalls, type Unknowns } from './factor-memory.ts';
import { runTogether, type CholeskyFactor, type Team } from './factorise.ts';
import { makeCalls, type KernelCall } from './kernels.ts';
import type { Ranges } from './work-split.ts';

/** A view of unknowns; to be made anew after the memory has grown. Length n * lanes. */
export function unknownsView(
	{ symbolic, space }: CholeskyFactor,
	at: number,
	lanes: number
): Float64Array {
	return new Float64Array(space.memory.buffer, at, symbolic.n * lanes);
}

type Kernel = 'forward' | 'backward' | 'forwardLanes' | 'backwardLanes';

/**
 * y = L^-1 y. With a second thread each has the unknowns of its subtrees and a copy of those above:
 * the two copies' shares of those above are added up.
 */
export function substituteForward(factor: CholeskyFactor, unknowns: Unknowns): void {
	const { symbolic, space, team } = factor;
	const { at, otherAt, lanes } = unknowns;
	const kernel = lanes === 1 ? 'forward' : 'forwardLanes';
	if (!team) return space.kernels[kernel](0, symbolic.supernodes, at);
	const { other, top } = team.split;
	const y = unknownsView(factor, at, lanes);
	const z = unknownsView(factor, otherAt, lanes);
	eachRun(symbolic, other, lanes, (begin, end) => z.set(y.subarray(begin, end), begin));
	eachRun(symbolic, top, lanes, (begin, end) => z.fill(0, begin, end));
	substituteTogether(factor, team, kernel, unknowns);
	eachRun(symbolic, top, lanes, (begin, end) => {
		for (let k = begin; k < end; k++) y[k] += z[k];
	});
	makeCalls(space.kernels, callsOver(kernel, top, at));
	eachRun(symbolic, other, lanes, (begin, end) => y.set(z.subarray(begin, end), begin));
}

/** y = L^-T y. The answer above is handed to both threads. */
export function substituteBackward(factor: CholeskyFactor, unknowns: Unknowns): void {
	const { symbolic, space, team } = factor;
	const { at, otherAt, lanes } = unknowns;
	const kernel = lanes === 1 ? 'backward' : 'backwardLanes';
	if (!team) return space.kernels[kernel](0, symbolic.supernodes, at);
	const { other, top } = team.split;
	const y = unknownsView(factor, at, lanes);
	const z = unknownsView(factor, otherAt, lanes);
	makeCalls(space.kernels, callsOver(kernel, top, at));
	for (const ranges of [top, other]) {
		eachRun(symbolic, ranges, lanes, (begin, end) => z.set(y.subarray(begin, end), begin));
	}
	substituteTogether(factor, team, kernel, unknowns);
	eachRun(symbolic, other, lanes, (begin, end) => y.set(z.subarray(begin, end), begin));
}

/** Calls `take` with the places in y of the columns of every range. */
function eachRun(
	{ start }: SymbolicFactor,
	ranges: Ranges,
	lanes: number,
	take: (begin: number, end: number) => void
): void {
	for (let r = 0; r < ranges.length; r += 2) {
		take(lanes * start[ranges[r]], lanes * start[ranges[r + 1]]);
	}
}

function substituteTogether(
	{ space }: CholeskyFactor,
	team: Team,
	kernel: Kernel,
	{ at, otherAt }: Unknowns
): void {
	runTogether(space, team, callsOver(kernel, team.split.own, at), [
		...bindCalls(space.layout, team.space.other),
		...callsOver(kernel, team.split.other, otherAt)
	]);
}

function callsOver(kernel: Kernel, ranges: Ranges, at: number): KernelCall[] {
	const calls: KernelCall[] = [];
	for (let r = 0; r < ranges.length; r += 2) calls.push([kernel, ranges[r], ranges[r + 1], at]);
	// A parent's unknowns are known before its children's.
	return kernel.startsWith('forward') ? calls : calls.reverse();
}
