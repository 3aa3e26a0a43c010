import type { Config } from 'tailwindcss'

// Tokens live as custom properties in src/ui/tokens.css (light and dark); Tailwind only names them.
export default {
  content: ['./src/**/*.{ts,tsx}'],
  theme: {
    extend: {
      colors: {
        paper: 'var(--paper)', tint: 'var(--tint)', ink: 'var(--ink)', 'ink-2': 'var(--ink-2)',
        rule: 'var(--rule)', line: 'var(--line)', copper: 'var(--copper)', 'copper-line': 'var(--copper-line)',
        'copper-pale': 'var(--copper-pale)', 'on-copper': 'var(--on-copper)', verd: 'var(--verd)',
        'verd-line': 'var(--verd-line)', 'verd-pale': 'var(--verd-pale)', 'on-verd': 'var(--on-verd)',
        error: 'var(--error)', 'error-pale': 'var(--error-pale)',
      },
      fontFamily: { display: 'var(--display)', text: 'var(--text)', mono: 'var(--mono)' },
      spacing: { unit: '14px', 'unit-2': '28px', 'unit-3': '42px', 'unit-4': '56px' },
    },
  },
} satisfies Config
