import { mkdir, readFile, readlink, rename, rm, writeFile } from 'node:fs/promises';
import { hostname } from 'node:os';
import { join } from 'node:path';
import lockfile from 'proper-lockfile';

/** Another process has this data folder open. */
export class FolderInUseError extends Error {
  constructor(folder: string, owner: Owner | null) {
    const who = owner ? ` (process ${owner.pid} on ${owner.host}, since ${owner.since})` : '';
    super(
      `The data folder ${folder} is in use by another Gustbook server${who}. ` +
        'Two servers on one folder would lose data, so this one stops. Stop the other one first, or give this one its own folder with GUSTBOOK_DATA.',
    );
    this.name = 'FolderInUseError';
  }
}

interface Owner {
  pid: number;
  host: string;
  /** Process numbers mean something only within one start of the machine and one process namespace. */
  space: string;
  since: string;
}

async function processSpace(): Promise<string> {
  const boot = await readFile('/proc/sys/kernel/random/boot_id', 'utf8').catch(() => '');
  const namespace = await readlink('/proc/self/ns/pid').catch(() => '');
  return `${boot.trim()} ${namespace}`;
}

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (cause) {
    return (cause as NodeJS.ErrnoException).code === 'EPERM';
  }
}

/**
 * Exclusive hold of a data folder. The lock is a folder whose time stamp is kept fresh (proper-lockfile); beside it stands who holds it,
 * so that the lock of a process that was killed on this very machine is taken over at once instead of after it has gone stale.
 */
export class FolderLock {
  private constructor(
    private readonly folder: string,
    private readonly unlock: () => Promise<void>,
  ) {}

  static async take(folder: string): Promise<FolderLock> {
    await mkdir(folder, { recursive: true });
    const ownerPath = join(folder, 'owner.json');
    const options: lockfile.LockOptions = {
      lockfilePath: join(folder, 'owner.lock'),
      stale: 15_000,
      update: 3_000,
      onCompromised: (cause) => {
        // Somebody else may be writing: going on could lose data.
        process.stderr.write(
          `The hold on the data folder ${folder} was lost (${cause.message}); stopping.\n`,
        );
        process.exit(70);
      },
    };
    const space = await processSpace();
    const owner = await readFile(ownerPath, 'utf8').then(
      (text) => JSON.parse(text) as Owner,
      () => null,
    );
    const isDead = (one: Owner) => one.host === hostname() && one.space === space && !isAlive(one.pid);
    if (owner && isDead(owner)) {
      // Only the one who gets hold of the dead owner's note may break its lock: two servers starting at once must not both.
      const claim = `${ownerPath}.${process.pid}`;
      const claimed = await rename(ownerPath, claim).then(
        () => true,
        () => false,
      );
      if (claimed) {
        const note = JSON.parse(await readFile(claim, 'utf8')) as Owner;
        if (isDead(note)) await rm(options.lockfilePath as string, { recursive: true, force: true });
        else await rename(claim, ownerPath);
        await rm(claim, { force: true });
      }
    }
    let release: () => Promise<void>;
    try {
      release = await lockfile.lock(folder, options);
    } catch (cause) {
      if ((cause as NodeJS.ErrnoException).code === 'ELOCKED') throw new FolderInUseError(folder, owner);
      throw cause;
    }
    const self: Owner = { pid: process.pid, host: hostname(), space, since: new Date().toISOString() };
    await writeFile(ownerPath, JSON.stringify(self));
    return new FolderLock(folder, release);
  }

  async release(): Promise<void> {
    await rm(join(this.folder, 'owner.json'), { force: true });
    await this.unlock();
  }
}
