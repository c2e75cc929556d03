declare module '@citation-js/core' {
  /** Data are CSL-JSON items, as unknown as what they were made from. */
  export class Cite {
    constructor(input: unknown, options: { forceType: string; generateGraph: boolean })
    readonly data: unknown[]
    format(
      as: 'bibliography',
      options: { format: 'text'; template: string; lang: string; asEntryArray: true },
    ): [id: string, text: string][]
  }
}
declare module '@citation-js/plugin-bibtex' {}
declare module '@citation-js/plugin-csl' {}
