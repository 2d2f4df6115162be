/** Where a port is. `text` is the address as the rig writes it and identifies the port. */
export type Address =
  | { readonly kind: 'serial'; readonly text: string; readonly path: string; readonly baud: number | null }
  | { readonly kind: 'tcp'; readonly text: string; readonly host: string; readonly port: number }
  | { readonly kind: 'udp'; readonly text: string; readonly host: string; readonly port: number }
  | {
      readonly kind: 'sim';
      readonly text: string;
      readonly what: 'hand' | 'arm';
      readonly options: ReadonlyMap<string, string>;
    };
