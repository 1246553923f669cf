/**
 * Points on the die and on the screen are never mixed up: each is a branded tuple, made only here.
 */
declare const space: unique symbol;

/** On the die, um, x to the right and y up. */
export type DiePoint = readonly [xUm: number, yUm: number] & { readonly [space]: 'die' };
/** On the canvas, CSS pixels from its upper left corner, y down. */
export type ScreenPoint = readonly [xPx: number, yPx: number] & { readonly [space]: 'screen' };

export function diePoint(xUm: number, yUm: number): DiePoint {
	return [xUm, yUm] as unknown as DiePoint;
}

export function screenPoint(xPx: number, yPx: number): ScreenPoint {
	return [xPx, yPx] as unknown as ScreenPoint;
}
