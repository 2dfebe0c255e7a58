import { execFileSync, spawnSync } from 'node:child_process';
import { statSync } from 'node:fs';
import { SetUpError } from '../set-up-error.js';

/** The user that PostgreSQL runs as. It refuses to run as root. */
export interface Owner {
  userId: number;
  groupId: number;
}

const ourUserId = process.getuid?.() ?? 0;
const ourGroupId = process.getgid?.() ?? 0;
const weAreRoot = ourUserId === 0;

/** For a new cluster: ourselves, or as root the user that Debian's package makes for this. */
export function ownerOfNewCluster(): Owner {
  if (!weAreRoot) return { userId: ourUserId, groupId: ourGroupId };
  const id = (flag: string): number => Number(execFileSync('id', [flag, 'postgres'], { encoding: 'utf8' }));
  try {
    return { userId: id('-u'), groupId: id('-g') };
  } catch (cause) {
    throw new SetUpError(
      'PostgreSQL refuses to run as root, and there is no user postgres to run it.',
      'Install the package of the distribution, which makes that user: apt-get install -y --no-install-recommends postgresql.',
      { cause },
    );
  }
}

/** For a cluster that exists: whoever owns its files. */
export function ownerOfCluster(folder: string): Owner {
  const { uid, gid } = statSync(folder);
  if (!weAreRoot && uid !== ourUserId) {
    throw new SetUpError(
      `The database in ${folder} belongs to another user (number ${uid.toString()}).`,
      'Start Refettle as the user who started it first, or name another data folder: REFETTLE_DATA=/path/to/folder npm start.',
    );
  }
  return { userId: uid, groupId: gid };
}

/**
 * The command that runs `command` as the owner. With `endsWithUs`, the kernel tells it to stop (SIGINT: PostgreSQL's fast shutdown) when
 * the thread that started it is gone: no server outlives a killed one of ours.
 */
export function asOwner(owner: Owner, command: string[], options: { endsWithUs: boolean }): [file: string, args: string[]] {
  const become = weAreRoot ? [`--reuid=${owner.userId.toString()}`, `--regid=${owner.groupId.toString()}`, '--clear-groups'] : [];
  return ['setpriv', [...become, ...(options.endsWithUs ? ['--pdeathsig=INT'] : []), '--', ...command]];
}

/** Every folder above must let the owner through, too: only trying it as the owner tells. */
export function canReach(owner: Owner, folder: string): boolean {
  const [file, args] = asOwner(owner, ['test', '-x', folder], { endsWithUs: false });
  return spawnSync(file, args, { stdio: 'ignore' }).status === 0;
}
