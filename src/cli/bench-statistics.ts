/** Median and 95th percentile of repeated measurements. */
export interface Spread {
	readonly median: number;
	readonly p95: number;
}

/** The value that a share of the sorted values does not exceed (nearest rank). */
function rank(sorted: readonly number[], share: number): number {
	return sorted[Math.max(0, Math.ceil(share * sorted.length) - 1)];
}

export function spreadOf(values: readonly number[]): Spread {
	const sorted = [...values].sort((a, b) => a - b);
	return { median: rank(sorted, 0.5), p95: rank(sorted, 0.95) };
}

/** Largest memory that the process has had, MB. */
export function peakMb(): number {
	return process.resourceUsage().maxRSS / 1024;
}
