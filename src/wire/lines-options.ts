/** How a board's text lines look, on either side. Absent keys stand for what most sketches print. */
export interface LinesOptions extends LinesCommands {
  /** What splits the numbers of a line, one character; null: comma, semicolon, or a run of tabs and spaces. */
  readonly separator: string | null;
  /** `on_change`: silence means that nothing moved, not that contact is lost. */
  readonly sends: 'always' | 'on_change';
  /** Checksum at the end of each line received, after a `*`, as two hexadecimal digits; null: none. */
  readonly checksum: 'xor' | 'sum' | null;
}

/** What a follower is told, as text. */
export interface LinesCommands {
  /** The line of one command, e.g. `"{shoulder.us},{elbow.us}\n"` or `"S{shoulder.deg:1}\n"`. */
  readonly template: string | null;
  /** Sent as it stands to end the pulses; null: this board cannot. */
  readonly limp: string | null;
  /** Sent as they stand to switch power on and off; null: this board cannot. */
  readonly powerOn: string | null;
  readonly powerOff: string | null;
}
