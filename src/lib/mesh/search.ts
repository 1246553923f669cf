/** First index in [from, to) whose value is not below `value`, or `to`; values ascend. */
export function lowerBound(values: Int32Array, from: number, to: number, value: number): number {
	let low = from;
	let high = to;
	while (low < high) {
		const middle = (low + high) >>> 1;
		if (values[middle] < value) low = middle + 1;
		else high = middle;
	}
	return low;
}

/** Steps that `lowerBoundNear` walks before it turns to bisection. */
const WALK_STEPS = 8;

/**
 * `lowerBound` for questions that come in order: walks from where the last answer was, and bisects
 * where that is not near.
 */
export function lowerBoundNear(
	values: Int32Array,
	from: number,
	to: number,
	value: number,
	hint: number
): number {
	let index = hint < from ? from : hint > to ? to : hint;
	for (let step = 0; step < WALK_STEPS; step++) {
		if (index < to && values[index] < value) index++;
		else if (index > from && values[index - 1] >= value) index--;
		else return index;
	}
	return index < to && values[index] < value
		? lowerBound(values, index + 1, to, value)
		: lowerBound(values, from, index, value);
}
