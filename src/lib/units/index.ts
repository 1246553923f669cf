export type { Unit } from './unit.ts';
export { SYMBOLS } from './unit.ts';
export type { QuantityResult } from './parse.ts';
export { parseQuantity } from './parse.ts';
export type { FormatOptions } from './format.ts';
export { formatQuantity } from './format.ts';
