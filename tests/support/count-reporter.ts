import { writeFileSync } from 'node:fs';
import type { Reporter, TestModule, Vitest } from 'vitest/node';

/**
 * Prints `N passed, N failed` as the last line, and writes the counts where COUNTS_FILE says, for the
 * sum over all suites. A file that does not load and an error outside tests count as failed.
 */
export default class CountReporter implements Reporter {
	onInit(_vitest: Vitest): void {}

	onTestRunEnd(modules: readonly TestModule[], errors: readonly unknown[]): void {
		let passed = 0;
		let failed = errors.length;
		let skipped = 0;
		for (const module of modules) {
			failed += module.errors().length;
			for (const test of module.children.allTests()) {
				const { state } = test.result();
				if (state === 'passed') passed++;
				else if (state === 'failed') failed++;
				else skipped++;
			}
		}
		const skips = skipped > 0 ? `, ${skipped} skipped` : '';
		console.log(`\n${passed} passed, ${failed} failed${skips}`);
		if (process.env.COUNTS_FILE) {
			writeFileSync(process.env.COUNTS_FILE, JSON.stringify({ passed, failed, skipped }));
		}
	}
}
