import { canSeparate } from '../../wire/lines-parser.ts';
import { compileTemplate, escapeMistake } from '../../wire/template.ts';
import { outputWiring } from '../compile-follower.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { LeaderProfile } from '../schema/leader.ts';
import type { Loose } from '../shape.ts';
import { wireName } from '../wire-choice.ts';
import type { Note } from './note.ts';

/** The texts a follower on `lines` is spoken to with. */
export function textRules(follower: Loose<FollowerProfile>, note: Note): void {
  const { wire } = follower;
  if (wireName(wire) !== 'lines') return;
  const texts = typeof wire === 'object' ? (wire.lines ?? {}) : {};
  for (const key of ['limp', 'power_on', 'power_off'] as const) {
    const mistake = texts[key] === undefined ? null : escapeMistake(texts[key]);
    if (mistake !== null) note('RIG_TEMPLATE', ['wire', 'lines', key], mistake.wrong, mistake.remedy);
  }
  if (!('template' in texts)) {
    const right = 'give the line its sketch reads: wire: { lines: { template: "{shoulder.us},{elbow.us}\\n" } }';
    note('RIG_TEMPLATE_MISSING', ['wire'], 'a follower on lines needs a template', right);
    return;
  }
  const wiring = outputWiring(follower);
  const compiled = texts.template === undefined || wiring === null ? null : compileTemplate(texts.template, wiring);
  if (compiled?.kind === 'mistake')
    note('RIG_TEMPLATE', ['wire', 'lines', 'template'], compiled.wrong, compiled.remedy);
  else if (compiled !== null && endsInNumber(texts.template ?? '')) {
    const wrong = 'the line ends in a number, and the sketch cannot tell where it is whole';
    note('RIG_TEMPLATE', ['wire', 'lines', 'template'], wrong, 'end the template with "\\n", in double quotes');
  }
}

/** How either end splits the numbers of a line. */
export function separatorRule({ wire }: Loose<LeaderProfile>, note: Note): void {
  const separator = typeof wire === 'object' ? wire.lines?.separator : undefined;
  if (separator === undefined || canSeparate(separator)) return;
  const wrong = `${JSON.stringify(separator)} may stand in a number, a name or a checksum`;
  note('RIG_SEPARATOR', ['wire', 'lines', 'separator'], wrong, 'use one sign such as ";" "," "|" or " "');
}

/** A placeholder that nothing follows; "}}" at the end is a brace. */
function endsInNumber(template: string): boolean {
  return (/\}*$/.exec(template)?.[0].length ?? 0) % 2 === 1;
}
