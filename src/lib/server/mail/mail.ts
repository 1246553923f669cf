import { mkdir, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { config } from '../config.ts';

export interface MailMessage {
	readonly to: string;
	readonly subject: string;
	readonly text: string;
}

/**
 * Sends a mail. For now into a local folder that stands for the mail server, one JSON file per
 * message, so that whoever develops can read what people would get.
 */
export async function sendMail(message: MailMessage): Promise<void> {
	const folder = config().MANYWEIR_MAIL_FOLDER;
	await mkdir(folder, { recursive: true });
	const name = `${new Date().toISOString().replace(/[:.]/g, '-')}-${crypto.randomUUID()}.json`;
	await writeFile(join(folder, name), JSON.stringify(message, null, '\t'), { mode: 0o600 });
}
