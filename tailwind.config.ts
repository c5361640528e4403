import type { Config } from 'tailwindcss'

/** Colours are CSS variables (assets/css/base.css), so that light and dark are one set of class names. */
const state = ['steady', 'manual', 'saturated', 'hunting', 'offTarget', 'sensor', 'down', 'noData'] as const

export default {
  content: ['./app.vue', './error.vue', './pages/**/*.vue', './components/**/*.vue', './layouts/**/*.vue', './composables/**/*.ts', './stores/**/*.ts', './utils/**/*.ts'],
  darkMode: ['selector', '[data-theme="dark"]'],
  theme: {
    fontFamily: { sans: ['Inter', 'system-ui', 'sans-serif'] },
    // Four sizes, and no more.
    fontSize: { small: ['12px', '16px'], body: ['14px', '20px'], lead: ['16px', '24px'], title: ['21px', '29px'] },
    extend: {
      colors: {
        paper: 'var(--paper)', panel: 'var(--panel)', line: 'var(--line)', ink: 'var(--ink)', quiet: 'var(--quiet)',
        act: 'var(--act)', onAct: 'var(--on-act)', tint: 'var(--tint)', warn: 'var(--warn)',
        ...Object.fromEntries(state.map(name => [name, `var(--state-${name})`])),
      },
      screens: { phone: { max: '639px' } },
    },
  },
} satisfies Config
