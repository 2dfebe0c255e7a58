import { readdirSync } from 'node:fs';
import { join } from 'node:path';
import { deviceOf } from './port-holder.js';

/** A serial port of this machine, under the name that stays the same when it is plugged in again. */
export interface MachinePort {
  path: string;
  /** The device itself, such as `/dev/ttyUSB0`; its number may be another one tomorrow. */
  device: string;
  /** Who made the adapter, where the system knows. */
  maker?: string | undefined;
}

/** What USB adapters and boards with USB of their own are called on Linux. A board's fixed ports (`ttyS0`) come from the system's list only. */
const PLUGGED_IN = /^tty(?:USB|ACM)\d+$/;

export interface MachinePortsOptions {
  /** Another folder in place of /dev. */
  deviceFolder?: string;
  /** The system's own list (udev); it may fail where udev is absent. */
  list?: () => Promise<readonly { path: string; manufacturer?: string | undefined; vendorId?: string | undefined }[]>;
}

async function systemList(): Promise<readonly { path: string; manufacturer?: string | undefined; vendorId?: string | undefined }[]> {
  const { serialDriver } = await import('./serial-driver.js');
  return serialDriver.list();
}

/**
 * The serial ports of this machine: those with a stable name first (`/dev/serial/by-id`), each once. Works without udev, which
 * the driver's own list needs.
 */
export async function machinePorts({ deviceFolder = '/dev', list = systemList }: MachinePortsOptions = {}): Promise<MachinePort[]> {
  const listed = await list().catch(() => []);
  const stableFolder = join(deviceFolder, 'serial', 'by-id');
  const paths = [
    ...namesIn(stableFolder).map((name) => join(stableFolder, name)),
    ...namesIn(deviceFolder)
      .filter((name) => PLUGGED_IN.test(name))
      .map((name) => join(deviceFolder, name)),
    // Boards name fixed ports that nothing hangs on; what udev knows no maker of is such a one.
    ...listed.filter(({ vendorId, manufacturer }) => vendorId !== undefined || manufacturer !== undefined).map(({ path }) => path),
  ];
  const ports = new Map<string, MachinePort>();
  for (const path of paths) {
    const device = deviceOf(path);
    if (ports.has(device)) continue;
    const maker = listed.find((one) => deviceOf(one.path) === device)?.manufacturer;
    ports.set(device, { path, device, ...(maker === undefined ? {} : { maker }) });
  }
  return [...ports.values()].sort((one, other) => one.path.localeCompare(other.path, 'en', { numeric: true }));
}

function namesIn(folder: string): string[] {
  try {
    return readdirSync(folder);
  } catch {
    return [];
  }
}
