import { defineConfig, devices } from '@playwright/test';

/** Debian's browser: none is downloaded. */
const CHROMIUM = '/usr/bin/chromium';

export default defineConfig({
	testDir: 'tests/e2e',
	outputDir: 'test-results',
	globalSetup: './tests/e2e/global-setup.ts',
	fullyParallel: false,
	// One worker: the machines have two cores, and the product needs one of them.
	workers: 1,
	timeout: 60_000,
	expect: { timeout: 15_000 },
	forbidOnly: Boolean(process.env.CI),
	reporter: [['list'], ['./tests/support/playwright-reporter.ts']],
	use: {
		...devices['Desktop Chrome'],
		viewport: { width: 1280, height: 800 },
		trace: 'retain-on-failure',
		launchOptions: {
			executablePath: CHROMIUM,
			args: [
				'--no-sandbox',
				'--disable-gpu',
				'--disable-quic',
				'--no-first-run',
				'--disable-background-networking',
				'--disable-component-update',
				'--disable-sync'
			]
		}
	}
});
