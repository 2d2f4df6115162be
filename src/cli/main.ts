#!/usr/bin/env node
import { runProgram } from './program.ts';

// A reader that has seen enough (head, a closed pager) ends the program quietly; nothing that moves writes this way.
process.stdout.on('error', (fault: NodeJS.ErrnoException) => process.exit(fault.code === 'EPIPE' ? 0 : 1));

const status = await runProgram(process.argv.slice(2));
// A port that the system does not let go of must not keep the program alive; what is printed leaves first.
process.stdout.write('', () => process.exit(status));
