import { writeFileSync } from 'node:fs';
import type { FullConfig, Reporter, Suite } from '@playwright/test/reporter';

/** Prints `N passed, N failed` last, and writes the counts where COUNTS_FILE says. */
export default class CountReporter implements Reporter {
	#suite: Suite | undefined;
	#errors = 0;

	onBegin(_config: FullConfig, suite: Suite): void {
		this.#suite = suite;
	}

	/** An error outside tests, such as a server that does not start. */
	onError(): void {
		this.#errors++;
	}

	onEnd(): void {
		const outcomes = this.#suite?.allTests().map((test) => test.outcome()) ?? [];
		const count = (...kinds: string[]) => outcomes.filter((one) => kinds.includes(one)).length;
		const counts = {
			passed: count('expected', 'flaky'),
			failed: count('unexpected') + this.#errors,
			skipped: count('skipped')
		};
		const skips = counts.skipped > 0 ? `, ${counts.skipped} skipped` : '';
		console.log(`\n${counts.passed} passed, ${counts.failed} failed${skips}`);
		if (process.env.COUNTS_FILE) writeFileSync(process.env.COUNTS_FILE, JSON.stringify(counts));
	}

	printsToStdio(): boolean {
		return true;
	}
}
