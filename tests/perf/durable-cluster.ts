// Measurements wait for the disk as a shop's own server does.
import type { TestProject } from 'vitest/node';
import { setup as start } from '../helpers/database-cluster.js';

export const setup = (project: TestProject): Promise<() => Promise<void>> => start(project, { durable: true });
