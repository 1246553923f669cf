import js from '@eslint/js';
import prettier from 'eslint-config-prettier';
import svelte from 'eslint-plugin-svelte';
import globals from 'globals';
import ts from 'typescript-eslint';
import svelteConfig from './svelte.config.js';
import { MAY_IMPORT, PURE, PURE_GLOBALS, REASON } from './tests/support/import-table.js';

/** Lint rules of the import table: for each folder, the folders that it may not import. */
const boundaries = Object.entries(MAY_IMPORT).map(([folder, allowed]) => ({
	files: [`src/lib/${folder}/**/*.{ts,svelte}`],
	ignores: ['**/*.test.ts'],
	rules: {
		'no-restricted-imports': [
			'error',
			{
				patterns: Object.keys(MAY_IMPORT)
					.filter((other) => other !== folder && !allowed.includes(other))
					.map((other) => ({ group: [`#lib/${other}/**`], message: REASON }))
			}
		]
	}
}));

/** Pure folders name no page, process, clock or chance. */
const pure = {
	files: PURE.map((folder) => `src/lib/${folder}/**/*.ts`),
	ignores: ['**/*.test.ts', 'src/lib/contracts/client.ts'],
	rules: {
		'no-restricted-globals': [
			'error',
			...PURE_GLOBALS,
			{ name: 'fetch', message: 'Pure code asks nobody: take the data as an argument.' }
		],
		'no-restricted-properties': [
			'error',
			{ object: 'Math', property: 'random', message: 'Pure code takes a seed.' }
		]
	}
};

export default ts.config(
	{
		ignores: [
			'build/',
			'.svelte-kit/',
			'.manyweir/',
			'node_modules/',
			'test-results/',
			'drizzle/',
			// AssemblyScript: its compiler checks it.
			'src/lib/sparse/assembly/'
		]
	},
	js.configs.recommended,
	...ts.configs.recommended,
	...svelte.configs.recommended,
	prettier,
	...svelte.configs.prettier,
	{
		languageOptions: { globals: { ...globals.browser, ...globals.node } },
		rules: {
			// TypeScript knows better which names exist.
			'no-undef': 'off',
			'@typescript-eslint/no-unused-vars': [
				'error',
				{ argsIgnorePattern: '^_', varsIgnorePattern: '^_', caughtErrorsIgnorePattern: '^_' }
			],
			'@typescript-eslint/consistent-type-imports': 'error',
			'@typescript-eslint/no-explicit-any': 'error'
		}
	},
	{
		files: ['src/**/*.ts', 'tests/**/*.ts', '**/*.svelte'],
		languageOptions: {
			parserOptions: {
				projectService: true,
				extraFileExtensions: ['.svelte'],
				parser: ts.parser,
				svelteConfig
			}
		},
		rules: {
			'@typescript-eslint/no-floating-promises': 'error',
			'@typescript-eslint/no-misused-promises': [
				'error',
				{ checksVoidReturn: { attributes: false, properties: false } }
			],
			'@typescript-eslint/switch-exhaustiveness-check': [
				'error',
				{ considerDefaultExhaustiveForUnions: true }
			]
		}
	},
	{
		files: ['**/*.svelte', '**/*.svelte.ts'],
		rules: {
			// Paths of this product are written as they are; it is not served below another path.
			'svelte/no-navigation-without-resolve': 'off'
		}
	},
	...boundaries,
	pure
);
