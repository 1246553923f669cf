import { readFileSync } from 'node:fs';
import { expect, it } from 'vitest';
import { KERNELS_FILE, kernelsFile } from '../../src/cli/build-kernels.mjs';

it('the kept WebAssembly modules are what their sources give (else: npm run build:kernels)', async () => {
	expect(readFileSync(KERNELS_FILE, 'utf8')).toBe(await kernelsFile());
}, 60_000);
