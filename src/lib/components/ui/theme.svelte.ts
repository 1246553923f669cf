/** Where the choice is kept; app.html reads it before the first paint. */
const KEY = 'manyweir-theme';

export const THEME_CHOICES = ['light', 'dark', 'system'] as const;
export type ThemeChoice = (typeof THEME_CHOICES)[number];

/** The theme of this browser: what was chosen, and what that comes to now. */
class Theme {
	#choice = $state<ThemeChoice>('system');
	#isSystemDark = $state(false);

	get choice(): ThemeChoice {
		return this.#choice;
	}

	/** The theme that is seen; the canvas and the map's legend paint by it. */
	get name(): 'light' | 'dark' {
		if (this.#choice !== 'system') return this.#choice;
		return this.#isSystemDark ? 'dark' : 'light';
	}

	/** Takes up the stored choice and follows the system; returns how to stop. Only in a browser. */
	start(): () => void {
		const stored = readChoice();
		if (stored) this.#choice = stored;
		const system = matchMedia('(prefers-color-scheme: dark)');
		const follow = () => {
			this.#isSystemDark = system.matches;
			this.#apply();
		};
		follow();
		system.addEventListener('change', follow);
		return () => system.removeEventListener('change', follow);
	}

	choose(choice: ThemeChoice): void {
		this.#choice = choice;
		try {
			localStorage.setItem(KEY, choice);
		} catch {
			// Storage is switched off or full: the choice holds for this page.
		}
		this.#apply();
	}

	#apply(): void {
		document.documentElement.dataset.theme = this.name;
	}
}

function readChoice(): ThemeChoice | undefined {
	try {
		const stored = localStorage.getItem(KEY);
		return THEME_CHOICES.find((choice) => choice === stored);
	} catch {
		return undefined;
	}
}

export const theme = new Theme();
