import adapter from '@sveltejs/adapter-node';
import { vitePreprocess } from '@sveltejs/vite-plugin-svelte';

/** @type {import('@sveltejs/kit').Config} */
export default {
	preprocess: vitePreprocess(),
	kit: {
		adapter: adapter({ precompress: true }),
		// Old tabs notice a new release by polling the version file (UX-72).
		version: { pollInterval: 60_000 },
		csp: {
			mode: 'auto',
			directives: {
				'default-src': ['self'],
				// The solver's kernels are WebAssembly modules of our own.
				'script-src': ['self', 'wasm-unsafe-eval'],
				'style-src': ['self'],
				// SvelteKit's route announcer and server-rendered style directives need style attributes.
				'style-src-attr': ['unsafe-inline'],
				'img-src': ['self', 'data:', 'blob:'],
				'font-src': ['self'],
				'connect-src': ['self'],
				'worker-src': ['self'],
				'object-src': ['none'],
				'base-uri': ['none'],
				'form-action': ['self'],
				'frame-ancestors': ['none']
			}
		}
	}
};
