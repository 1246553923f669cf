/** Engines by the word that tells them; the more telling words come first. */
const BROWSERS: readonly (readonly [word: string, name: string])[] = [
	['Edg/', 'Edge'],
	['OPR/', 'Opera'],
	['Firefox/', 'Firefox'],
	['Chrome/', 'Chrome'],
	['Safari/', 'Safari']
];
const SYSTEMS: readonly (readonly [word: string, name: string])[] = [
	['iPhone', 'iPhone'],
	['iPad', 'iPad'],
	['Android', 'Android'],
	['Windows', 'Windows'],
	['Mac OS', 'macOS'],
	['Linux', 'Linux']
];

function firstNamed(
	userAgent: string,
	names: readonly (readonly [string, string])[]
): string | undefined {
	return names.find(([word]) => userAgent.includes(word))?.[1];
}

/** A browser in words that its owner recognises: "Firefox on Linux". Not to be relied on for anything else. */
export function browserName(userAgent: string): string {
	const browser = firstNamed(userAgent, BROWSERS);
	const system = firstNamed(userAgent, SYSTEMS);
	if (browser && system) return `${browser} on ${system}`;
	return browser ?? system ?? (userAgent.split('/')[0].trim().slice(0, 40) || 'unknown browser');
}
