import { fileURLToPath } from 'node:url';
import { includeIgnoreFile } from '@eslint/compat';
import js from '@eslint/js';
import prettier from 'eslint-config-prettier/flat';
import svelte from 'eslint-plugin-svelte';
import globals from 'globals';
import ts from 'typescript-eslint';
import svelteConfig from './svelte.config.js';

const ignored = includeIgnoreFile(fileURLToPath(new URL('./.gitignore', import.meta.url)));

/** The pure core must run in the page, in a worker and in tests alike. */
const PURE = [
	'src/lib/kinetics/**/*.ts',
	'src/lib/assay/**/*.ts',
	'src/lib/recipe/**/*.ts',
	'src/lib/schemas/**/*.ts'
];

export default ts.config(
	ignored,
	js.configs.recommended,
	...ts.configs.recommendedTypeChecked,
	...svelte.configs.recommended,
	prettier,
	...svelte.configs.prettier,
	{
		languageOptions: {
			globals: { ...globals.browser, ...globals.node },
			parserOptions: {
				projectService: {
					allowDefaultProject: ['*.js']
				},
				extraFileExtensions: ['.svelte']
			}
		},
		rules: {
			'no-undef': 'off',
			'svelte/no-navigation-without-resolve': 'off',
			'@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }]
		}
	},
	{
		files: ['**/*.svelte', '**/*.svelte.ts'],
		languageOptions: { parserOptions: { parser: ts.parser, svelteConfig } }
	},
	{
		// Svelte's compiler types a component's members loosely for the linter; svelte-check types them in full.
		files: ['**/*.svelte'],
		rules: {
			'@typescript-eslint/no-unsafe-assignment': 'off',
			'@typescript-eslint/no-unsafe-member-access': 'off',
			'@typescript-eslint/no-unsafe-call': 'off',
			'@typescript-eslint/no-unsafe-argument': 'off',
			'@typescript-eslint/no-unsafe-return': 'off'
		}
	},
	{ files: ['**/*.js', '**/*.mjs'], ...ts.configs.disableTypeChecked },
	{
		files: PURE,
		ignores: ['**/*.test.ts'],
		rules: {
			'no-restricted-imports': [
				'error',
				{
					patterns: [
						{
							group: [
								'$lib/server/*',
								'$lib/server',
								'$lib/components/*',
								'$lib/client/*',
								'$app/*',
								'$env/*',
								'svelte',
								'svelte/*',
								'node:*',
								'sequelize',
								'sqlite3',
								'**/server/**'
							],
							message: 'The pure core imports nothing from the server, Svelte, Node or Sequelize.'
						}
					]
				}
			]
		}
	},
	{
		files: ['src/lib/server/**/*.ts'],
		rules: {
			'no-restricted-imports': [
				'error',
				{
					patterns: [
						{
							group: ['$lib/components/*', '**/components/**', '*.svelte', '$lib/client/*'],
							message: 'Server code never imports a component or page helper.'
						}
					]
				}
			]
		}
	},
	{
		files: ['src/routes/**/*.ts', 'src/routes/**/*.svelte'],
		rules: {
			'no-restricted-imports': [
				'error',
				{
					patterns: [
						{
							group: ['sequelize', '$lib/server/database/models/*', '$lib/server/database/models'],
							message: 'A route calls a use case; it does not query.'
						}
					]
				}
			]
		}
	}
);
