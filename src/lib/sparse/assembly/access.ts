/** Reads and writes of arrays by index; pointers are bytes of the memory. */

export function getI32(array: usize, index: i32): i32 {
	return load<i32>(array + ((<usize>index) << 2));
}

export function setI32(array: usize, index: i32, value: i32): void {
	store<i32>(array + ((<usize>index) << 2), value);
}

export function getF64(array: usize, index: i32): f64 {
	return load<f64>(array + ((<usize>index) << 3));
}

export function setF64(array: usize, index: i32, value: f64): void {
	store<f64>(array + ((<usize>index) << 3), value);
}

export function doubles(count: i32): usize {
	return (<usize>count) << 3;
}
