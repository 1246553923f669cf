import { hash, verify } from '@node-rs/argon2';

/** argon2id with the parameters of the OWASP Password Storage Cheat Sheet: 19 MiB, 2 passes, 1 lane. */
const OPTIONS = { algorithm: 2, memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const;

/**
 * Passwords that head every public list of leaked ones (from memory), and words that this product's
 * users would think of first.
 */
const COMMON = [
	'password',
	'passw0rd',
	'qwertyuiop',
	'1234567890',
	'0123456789',
	'123456789',
	'12345678',
	'qwerty123',
	'iloveyou',
	'letmein',
	'welcome',
	'adminadmin',
	'changeme',
	'abcdefghij',
	'1q2w3e4r5t',
	'manyweir',
	'regulator',
	'floorplan'
];

export function hashPassword(password: string): Promise<string> {
	return hash(password, OPTIONS);
}

/** A hash that no password has, so that an unknown name takes as long as a wrong password. */
const unknownUserHash = hashPassword(crypto.randomUUID());

/** Whether the password fits; takes as long where there is no such user. */
export async function checkPassword(
	storedHash: string | undefined,
	password: string
): Promise<boolean> {
	const isRight = await verify(storedHash ?? (await unknownUserHash), password);
	return isRight && storedHash !== undefined;
}

/** Why a new password will not do, or null. */
export function passwordProblem(password: string, personal: readonly string[]): string | null {
	const plain = password.toLowerCase().replace(/[\d\W_]+$/, '');
	if (COMMON.some((common) => password.toLowerCase() === common || plain === common)) {
		return 'This password is on every list of common passwords; choose another';
	}
	if (new Set(password).size < 4) return 'Use more different characters';
	const telling = personal
		.flatMap((text) => text.toLowerCase().split(/[@.\s]+/))
		.some((part) => part.length >= 4 && plain === part);
	return telling ? 'Do not use your name or address as the password' : null;
}
