import { sveltekit } from '@sveltejs/kit/vite';
import tailwindcss from '@tailwindcss/vite';
import { defineConfig } from 'vitest/config';

export default defineConfig({
	plugins: [tailwindcss(), sveltekit()],
	worker: { format: 'es' },
	// No data: URLs: the content security policy allows fonts from our own origin only.
	build: { assetsInlineLimit: 0 },
	optimizeDeps: { include: ['konva', 'svelte-konva', 'ml-matrix', 'zod'] },
	server: { watch: { ignored: ['**/.manyweir/**'] } },
	test: {
		reporters: ['default', './tests/support/count-reporter.ts'],
		projects: [
			{
				// Pure code: no database, no browser.
				test: {
					name: 'unit',
					setupFiles: ['./tests/support/fixed-seed.ts'],
					include: ['src/**/*.test.ts', 'tests/unit/**/*.test.ts'],
					exclude: ['src/lib/server/**/*.test.ts']
				}
			},
			{
				// The server's code on a real, throw-away database.
				test: {
					name: 'server',
					setupFiles: ['./tests/support/fixed-seed.ts'],
					include: ['src/lib/server/**/*.test.ts', 'tests/api/**/*.test.ts'],
					globalSetup: ['./tests/support/database-setup.ts'],
					testTimeout: 60_000,
					hookTimeout: 60_000,
					env: {
						LOG_LEVEL: 'silent',
						MANYWEIR_SOLVE_THREAD: '.manyweir/test-worker/solve-thread.js'
					}
				}
			},
			{
				// The solver against numbers from outside the project.
				test: {
					name: 'reference',
					setupFiles: ['./tests/support/fixed-seed.ts'],
					include: ['tests/reference/**/*.test.ts'],
					testTimeout: 300_000
				}
			}
		]
	}
});
