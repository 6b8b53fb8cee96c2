import type { Config } from 'tailwindcss';

/** Names of the look; the values for day and night shift stand as custom properties in src/app.css. */
const token = (name: string): string => `var(--${name})`;

export default {
	content: ['./src/**/*.{html,svelte,ts}'],
	darkMode: ['selector', '[data-shift="night"]'],
	theme: {
		extend: {
			colors: {
				paper: token('paper'),
				card: token('card'),
				ink: token('ink'),
				soft: token('soft'),
				rule: token('rule'),
				hair: token('hair'),
				edge: token('edge'),
				verdigris: { DEFAULT: token('verdigris'), pale: token('verdigris-pale'), ink: token('on-verdigris') },
				amber: { DEFAULT: token('amber'), pale: token('amber-pale') },
				brick: { DEFAULT: token('brick'), pale: token('brick-pale'), ink: token('on-brick') }
			},
			fontFamily: { sans: ['Lexend', 'system-ui', 'sans-serif'] }
		}
	}
} satisfies Config;
