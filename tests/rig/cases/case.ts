import type { FileText } from '../../../src/rig/file-reader.ts';
import type { Files } from '../memory.ts';

type Edit = readonly [from: string, to: string];

/** One thing an operator gets wrong, and every line that is said about it. */
export interface MistakeCase {
  readonly title: string;
  /** Changes to the rig and the follower file that are without mistakes. */
  readonly rig?: readonly Edit[];
  readonly stork?: readonly Edit[];
  /** A second follower like the changed one, with channels of its own. */
  readonly twin?: true;
  /** Other files altogether. */
  readonly files?: Files;
  /** The file that is loaded; rig.yaml where absent. */
  readonly file?: string;
  /** Instead of any text, what the disk says. */
  readonly fault?: Extract<FileText, { fault: string }>;
  /** Code, then the line. */
  readonly says: readonly string[];
}
