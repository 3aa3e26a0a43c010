import hooks from 'eslint-plugin-react-hooks'
import tseslint from 'typescript-eslint'

const oneWay = (folder, banned, why) => ({
  files: [`${folder}/**/*.{ts,tsx}`],
  rules: { 'no-restricted-imports': ['error', { patterns: banned.map((group) => ({ group: [group], message: why })) }] },
})

export default tseslint.config(
  { ignores: ['build/**', 'node_modules/**', '.data/**', 'test-results/**', 'playwright-report/**', 'coverage/**'] },
  ...tseslint.configs.recommended,
  {
    rules: {
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      '@typescript-eslint/consistent-type-imports': 'error',
      '@typescript-eslint/no-explicit-any': 'error',
      eqeqeq: 'error',
      'no-console': 'off',
    },
  },
  { files: ['src/**/*.tsx', 'src/**/*.ts'], plugins: { 'react-hooks': hooks }, rules: { ...hooks.configs.recommended.rules } },
  {
    // The core is pure: a clock, entropy or a locale arrive as arguments or not at all.
    files: ['shared/**/*.ts'],
    rules: {
      'no-restricted-globals': [
        'error',
        { name: 'Date', message: 'Pass the time in: shared/ is pure.' },
        { name: 'Intl', message: 'Locale data differs between machines: format outside shared/.' },
        { name: 'Buffer', message: 'Bytes are Uint8Array: shared/ runs in browsers too.' },
        { name: 'process', message: 'shared/ runs in browsers too.' },
        { name: 'crypto', message: 'Hashing and entropy are injected.' },
      ],
      'no-restricted-properties': [
        'error',
        { object: 'Math', property: 'random', message: 'Entropy is injected.' },
        { property: 'localeCompare', message: 'Order by code unit or byte: locale order differs between machines.' },
        { property: 'toLocaleString', message: 'Format outside shared/: locale data differs between machines.' },
      ],
    },
  },
  oneWay('shared', ['#server/*', '#src/*', 'node:*'], 'shared/ imports nothing of server/ or src/ and no Node module.'),
  oneWay('src', ['#server/*', 'node:*'], 'src/ never imports server code.'),
  oneWay('server', ['#src/*'], 'server/ loads the built bundle, never src/.'),
  oneWay('e2e', ['#server/*', '#src/*', '#shared/*'], 'Browser tests see the product from outside only.'),
)
