import { randomUUID } from 'node:crypto';
import { mkdir, rename, writeFile } from 'node:fs/promises';
import { join } from 'node:path';

export interface Mail {
  to: string;
  subject: string;
  text: string;
}

export type SendMail = (mail: Mail) => Promise<void>;

/** Mail of a server without a mail service: one text file each in the data folder's outbox. */
export function outbox(dataFolder: string): SendMail {
  const folder = join(dataFolder, 'outbox');
  return async (mail) => {
    await mkdir(folder, { recursive: true, mode: 0o700 });
    const name = `${new Date().toISOString().replace(/[:.]/g, '-')}-${randomUUID().slice(0, 8)}.txt`;
    // Line breaks in an address or subject could forge header lines.
    const oneLine = (text: string) => text.replace(/[\r\n]+/g, ' ');
    const content = `To: ${oneLine(mail.to)}\nSubject: ${oneLine(mail.subject)}\n\n${mail.text}\n`;
    const temporary = join(folder, `.${name}.part`);
    await writeFile(temporary, content, { mode: 0o600 });
    await rename(temporary, join(folder, name));
  };
}
