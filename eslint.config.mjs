import js from '@eslint/js';
import tseslint from 'typescript-eslint';

export default tseslint.config(
  { ignores: ['dist', 'node_modules', 'demo-result'] },
  js.configs.recommended,
  ...tseslint.configs.recommended,
  {
    files: ['**/*.mjs'],
    languageOptions: {
      globals: { process: 'readonly', console: 'readonly', URL: 'readonly', performance: 'readonly' },
    },
  },
  {
    rules: {
      '@typescript-eslint/no-explicit-any': 'error',
      'no-restricted-syntax': [
        'error',
        { selector: 'ExportDefaultDeclaration', message: 'Named exports only.' },
      ],
    },
  },
  // Imports run one way: materials and geometry know nobody, the engine knows them, the cli knows all.
  {
    files: ['materials/**/*.ts', 'geometry/**/*.ts'],
    rules: { 'no-restricted-imports': ['error', { patterns: ['**/engine/**', '**/cli/**'] }] },
  },
  {
    files: ['materials/**/*.ts'],
    rules: {
      'no-restricted-imports': ['error', { patterns: ['**/engine/**', '**/cli/**', '**/geometry/**'] }],
    },
  },
  {
    files: ['geometry/**/*.ts'],
    rules: {
      'no-restricted-imports': ['error', { patterns: ['**/engine/**', '**/cli/**', '**/materials/**'] }],
    },
  },
  {
    files: ['engine/**/*.ts'],
    rules: { 'no-restricted-imports': ['error', { patterns: ['**/cli/**'] }] },
  },
  { files: ['*.config.*'], rules: { 'no-restricted-syntax': 'off' } },
);
