// The command line as a process of its own: as npm test has just built it, otherwise from the sources.
const built = process.env['REFETTLE_TEST_PROGRAM'];

export const isBuilt = built !== undefined;

/** What stands before the program's own arguments when Node starts it; the working folder is the checkout. */
export const theProgram: readonly string[] = built === undefined ? ['--import', 'tsx', 'cli/main.ts'] : [built];
