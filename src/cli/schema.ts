import { Argument, Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { FILE_KINDS, jsonSchema } from '../rig/schema/json-schema.ts';

/** `eidograph schema KIND` */
export function schemaCommand(out: { write(text: string): unknown } = process.stdout): CommandUnknownOpts {
  return new Command('schema')
    .description('print the JSON Schema of a rig, leader or follower file, for editors')
    .addArgument(new Argument('<kind>', 'which kind of file').choices(FILE_KINDS))
    .action((kind) => {
      out.write(`${JSON.stringify(jsonSchema(kind), null, 2)}\n`);
    });
}
