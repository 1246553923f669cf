/**
 * Where the arrays of a factor lie; what each holds and how long it is stands at its declaration in
 * ../analyse.ts and ../factor-memory.ts. Pointers are bytes of the memory.
 */
import { getI32 } from './access';

export let start: usize = 0;
export let rowStart: usize = 0;
export let rows: usize = 0;
export let relative: usize = 0;
export let parent: usize = 0;
export let depthParity: usize = 0;
export let entryStart: usize = 0;
export let entryFrom: usize = 0;
export let entryTo: usize = 0;
export let values: usize = 0;
export let lastChild: usize = 0;
export let previousSibling: usize = 0;
export let updateStart: usize = 0;
let panelStart: usize = 0;
let panels: usize = 0;

export function bindSymbolic(
	startAt: usize,
	rowStartAt: usize,
	rowsAt: usize,
	relativeAt: usize,
	parentAt: usize,
	depthParityAt: usize,
	panelStartAt: usize
): void {
	start = startAt;
	rowStart = rowStartAt;
	rows = rowsAt;
	relative = relativeAt;
	parent = parentAt;
	depthParity = depthParityAt;
	panelStart = panelStartAt;
}

export function bindNumeric(
	entryStartAt: usize,
	entryFromAt: usize,
	entryToAt: usize,
	valuesAt: usize,
	panelsAt: usize,
	lastChildAt: usize,
	previousSiblingAt: usize,
	updateStartAt: usize
): void {
	entryStart = entryStartAt;
	entryFrom = entryFromAt;
	entryTo = entryToAt;
	values = valuesAt;
	panels = panelsAt;
	lastChild = lastChildAt;
	previousSibling = previousSiblingAt;
	updateStart = updateStartAt;
}

export function panelOf(s: i32): usize {
	return panels + ((<usize>load<u32>(panelStart + ((<usize>s) << 2))) << 3);
}

export function widthOf(s: i32): i32 {
	return getI32(start, s + 1) - getI32(start, s);
}

export function heightOf(s: i32): i32 {
	return getI32(rowStart, s + 1) - getI32(rowStart, s);
}
