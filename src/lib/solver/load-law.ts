/** Below this fraction of nominal a load's law is continued linearly to zero. */
export const COLLAPSE_FRACTION = 0.1;

/** Current of a load, A: nominalA (seen / volts)^exponent, linear to zero below a tenth of `volts`. */
export function loadCurrent(
	nominalA: number,
	seenV: number,
	volts: number,
	exponent: number
): number {
	const ratio = seenV / volts;
	if (ratio < COLLAPSE_FRACTION) {
		return nominalA * Math.pow(COLLAPSE_FRACTION, exponent - 1) * ratio;
	}
	return exponent === 0 ? nominalA : nominalA * Math.pow(ratio, exponent);
}

/** Slope of `loadCurrent` over the voltage seen, A per V. */
export function loadSlope(
	nominalA: number,
	seenV: number,
	volts: number,
	exponent: number
): number {
	const ratio = seenV / volts;
	if (ratio < COLLAPSE_FRACTION) {
		return (nominalA * Math.pow(COLLAPSE_FRACTION, exponent - 1)) / volts;
	}
	if (exponent === 0) return 0;
	return (nominalA * exponent * Math.pow(ratio, exponent - 1)) / volts;
}
