import { Command, CommanderError, InvalidArgumentError } from 'commander';
import type { Context } from './context.js';
import { EXIT } from './exit-codes.js';

/** Reads the command line and does what it says. Gives the exit code; every error has been said by then. */
export async function runProgram(args: readonly string[], context: Context): Promise<number> {
  const outcome = { code: EXIT.good as number };
  const program = createProgram(context, (code) => (outcome.code = code));
  try {
    await program.parseAsync([...args], { from: 'user' });
    return outcome.code;
  } catch (error) {
    if (error instanceof CommanderError)
      return error.code === 'commander.helpDisplayed' || error.code === 'commander.version' ? EXIT.good : EXIT.usage;
    return (await import('./report-error.js')).reportError(error, context);
  }
}

/** The commands. Each is loaded only when it runs, so that `--help` stays quick. */
export function createProgram(context: Context, done: (code: number) => void): Command {
  const program = new Command('refettle')
    .description('The bench companion of people who mend used household appliances.')
    .exitOverride()
    .showHelpAfterError('(refettle --help lists what there is)')
    .configureOutput({
      writeOut: (text) => context.stdout.write(text),
      writeErr: (text) => context.stderr.write(text),
      getOutHelpWidth: () => context.stdout.columns,
      getErrHelpWidth: () => context.stderr.columns,
      getOutHasColors: () => context.stdout.colourLevel > 0,
      getErrHasColors: () => context.stderr.colourLevel > 0,
    });
  const json = ['--json', 'answer in JSON, for programs'] as const;

  const does =
    <O>(load: () => Promise<(options: O, context: Context) => Promise<number>>) =>
    async (options: O): Promise<void> => {
      done(await (await load())(options, context));
    };

  program
    .command('sign-in')
    .description('sign in at the server; the token stays on this bench')
    .argument('[email]', 'your e-mail address')
    .option('--email <email>', 'the same, as an option')
    .option('--password-stdin', 'read the password from standard input')
    .option(...json)
    .action((email: string | undefined, options: { email?: string }) =>
      does(async () => (await import('./commands/sign-in.js')).runSignIn)({ ...options, email: email ?? options.email }),
    );
  program
    .command('sign-out')
    .description('sign out: the token is revoked')
    .action(does(async () => (await import('./commands/sign-out.js')).runSignOut));
  program
    .command('whoami')
    .description('who is signed in here, and at which server')
    .option(...json)
    .action(does(async () => (await import('./commands/whoami.js')).runWhoami));

  const unit = program.command('unit').description('units: the appliances on the books');
  unit
    .command('new')
    .description('take in a unit; asks for what is missing')
    .option('--appliance <kind>', 'washing machine, dryer, dishwasher, oven, gas hob, fridge, microwave oven, other')
    .option('--maker <maker>', 'as the rating plate has it')
    .option('--model <model>', 'as the rating plate has it')
    .option('--serial <serial>', 'as the rating plate has it')
    .option('--plate-unreadable', 'the plate has no serial that can be read')
    .option('--class <class>', 'protection class: I, II or III')
    .option('--volts <volts>', 'rated volts', number)
    .option('--hertz <hertz>', 'rated hertz', number)
    .option('--watts <watts>', 'rated watts', number)
    .option('--amperes <amperes>', 'rated amperes', number)
    .option('--mass <kg>', 'mass in kilograms', number)
    .option('--family <family>', 'control family: the service sheet it goes by')
    .option('--complaint <text>', 'what the machine is said to do')
    .option('--source <text>', 'where it came from')
    .option('--cost <money>', 'what was paid for it, like 12.50')
    .option('--same-serial <reason>', 'take it in although the serial is on the books: bought back, plate unreadable, other')
    .option(...json)
    .action(does(async () => (await import('./commands/unit/new.js')).runUnitNew));
  unit
    .command('show')
    .description('a unit: plate, stage, what is missing until ready, history')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option(...json)
    .action((number: number, options: { json?: boolean }) =>
      does(async () => (await import('./commands/unit/show.js')).runUnitShow)({ ...options, number }),
    );
  unit
    .command('family')
    .description('give a unit that came in without one its control family: the service sheet it goes by')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .argument('<family>', 'control family, like heron-h6')
    .option(...json)
    .action((number: number, family: string, options: { json?: boolean }) =>
      does(async () => (await import('./commands/unit/family.js')).runUnitFamily)({ ...options, number, family }),
    );
  unit
    .command('list')
    .description('the units, newest first')
    .option('--find <text>', 'a number, a maker, a model, a serial')
    .option('--stage <stage>', 'intake, testing, repair, proving, signed off, sold, returned')
    .option('--limit <count>', 'how many at most', number)
    .option(...json)
    .action(does(async () => (await import('./commands/unit/list.js')).runUnitList));

  const sheet = program.command('sheet').description('service sheets: what the shop knows of a control family');
  sheet
    .command('check')
    .description('whether a service sheet, or a bench script, holds together; needs no server')
    .argument('<file>', 'YAML or JSON')
    .option('--script <file>', 'check this bench script against the sheet too')
    .option(...json)
    .action((file: string, options: { script?: string; json?: boolean }) =>
      does(async () => (await import('./commands/sheet/check.js')).runSheetCheck)({ ...options, file }),
    );
  sheet
    .command('add')
    .description('add a sheet to the shop, or its next edition (a lead)')
    .argument('<file>', 'YAML or JSON')
    .option(...json)
    .action((file: string, options: { json?: boolean }) =>
      does(async () => (await import('./commands/sheet/add.js')).runSheetAdd)({ ...options, file }),
    );
  sheet
    .command('show')
    .description('a sheet of the shop, as its file')
    .argument('<family>', 'control family, like heron-h6')
    .option(...json)
    .action((family: string, options: { json?: boolean }) =>
      does(async () => (await import('./commands/sheet/show.js')).runSheetShow)({ ...options, family }),
    );

  const rig = ['--rig <rig>', 'rig file, or sim:NAME for simulated instruments (else rig.yaml in REFETTLE_HOME)'] as const;
  program
    .command('decode')
    .description('what lamp captures say; needs no server')
    .argument('<file...>', 'capture files (NAME.lamps.ndjson)')
    .requiredOption('--sheet <sheet>', 'service sheet, YAML or JSON')
    .option('--min-confidence <p>', 'how sure a code must be to be stated (0.999 unless told)')
    .option(...json)
    .action((files: string[], options: { sheet: string; minConfidence?: string; json?: boolean }) =>
      does(async () => (await import('./commands/without-server.js')).decodeInContext)({ ...options, files }),
    );
  program
    .command('judge')
    .description('whether a reading lies inside its limits; needs no server')
    .requiredOption('--value <value>', 'the reading, like 12.41k')
    .requiredOption('--unit <unit>', 'its unit; echoed, never converted')
    .option('--low <limit>', 'lower limit')
    .option('--high <limit>', 'upper limit')
    .requiredOption('--accuracy <accuracy>', "the meter's, like 0.8%+3")
    .requiredOption('--resolution <value>', "the value of the meter's last digit")
    .option('--coverage <factor>', 'coverage factor (2 unless told)')
    .option(...json)
    .action(does(async () => (await import('./commands/without-server.js')).judgeInContext));
  program
    .command('capture')
    .description('record the lamps of a unit')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--seconds <seconds>', 'how long (until you stop it, unless told)', number)
    .option(...rig)
    .option('--keys', 'no probe: tap the lamps with keys 1, 2, 3 …')
    .option('--file <file>', 'take a capture that was recorded before')
    .option('--sheet <file>', "decode by this sheet instead of the unit's own")
    .option('--out <file>', 'write the capture file here too')
    .option(...json)
    .action((number: number, options: object) =>
      does(async () => (await import('./commands/capture.js')).runCapture)({ ...options, number }),
    );
  program
    .command('measure')
    .description("take one check of the unit's sheet")
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .argument('<check>', 'check of the sheet, like drain-pump-winding')
    .option('--value <value>', 'the reading, typed in from a handheld meter')
    .option('--accuracy <accuracy>', "that meter's, like 0.8%+3")
    .option('--resolution <value>', "the value of that meter's last digit")
    .option('--meter <id>', 'which meter it was')
    .option('--verdict <verdict>', 'for a check that is looked at: pass, fail or inconclusive')
    .option('--note <text>', 'what was seen, for a check that is looked at')
    .option(...rig)
    .option(...json)
    .action((number: number, check: string, options: object) =>
      does(async () => (await import('./commands/measure.js')).runMeasure)({ ...options, number, check }),
    );
  program
    .command('run')
    .description('run a bench script on a unit')
    .argument('<script>', 'bench script, YAML')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option(...rig)
    .option('--unattended', 'ask nobody; on a real rig a script with a caution then does not begin')
    .option(...json)
    .action((script: string, number: number, options: object) =>
      does(async () => (await import('./commands/run.js')).runScriptCommand)({ ...options, script, number }),
    );
  program
    .command('repair')
    .description('put down what was mended')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--part <part>', 'the part, or what was done')
    .option('--source <source>', 'new, used:NUMBER (the unit it came from), or none')
    .option('--minutes <minutes>', 'how long it took', number)
    .option('--cost <money>', 'what the part cost, like 6.00')
    .option('--note <text>', 'a remark')
    .option(...json)
    .action((number: number, options: object) =>
      does(async () => (await import('./commands/repair.js')).runRepair)({ ...options, number }),
    );
  program
    .command('override')
    .description('open the dead-test gate of a unit with a reason (a lead)')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--reason <text>', 'why; it is recorded')
    .option(...json)
    .action((number: number, options: object) =>
      does(async () => (await import('./commands/override.js')).runOverride)({ ...options, number }),
    );
  program
    .command('sync')
    .description('send what waits on this bench')
    .option('--status', 'only say what waits, and who must act')
    .option('--drop <id>', 'give up on one that the server refuses; it stays on the disk')
    .option(...json)
    .action(does(async () => (await import('./commands/sync.js')).runSync));
  program
    .command('tag')
    .description("a unit's readiness tag, or what is missing until it has one")
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--pdf <file>', 'write it as an A6 page, for a card or label printer')
    .option(...json)
    .action((number: number, options: object) => does(async () => (await import('./commands/tag.js')).runTag)({ ...options, number }));

  return program;
}

/** `412`, `0412` and `No. 0412` are the same unit. */
export function unitNumber(text: string): number {
  const digits = /^(?:no\.?\s*)?(\d{1,9})$/i.exec(text.trim())?.[1];
  if (digits === undefined || Number(digits) === 0) throw new InvalidArgumentError('A unit number is digits, like 0412.');
  return Number(digits);
}

function number(text: string): number {
  const value = /^\d+(\.\d+)?$/.test(text) ? Number(text) : NaN;
  if (!Number.isFinite(value)) throw new InvalidArgumentError('Write a plain number, like 230 or 0.5.');
  return value;
}
