import type { ServerInit } from '@sveltejs/kit';
import { sequence } from '@sveltejs/kit/hooks';
import { HOOKS } from '#lib/server/hooks/index.ts';
import { closeRuntime } from '#lib/server/runtime.ts';

export { handleError } from '#lib/server/hooks/index.ts';

export const init: ServerInit = () => {
	process.on('sveltekit:shutdown', () => void closeRuntime());
};

export const handle = sequence(...HOOKS);
