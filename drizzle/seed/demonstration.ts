import { readFileSync } from 'node:fs'
import type { MemberRole, ReadAccess } from '#shared/api/roles.ts'

/**
 * The demonstration library: an invented consortium, its groups, people and twelve models. Everything here is made up;
 * the accounts exist only where this library was loaded, and only on loopback.
 */
export const demonstrationPassword = 'slow ramp to the brink'

/** `jobs` is what the sign-in page says about each. */
export const people = [
  { key: 'orla', name: 'Orla Tindlemoor', job: 'administrator', administrator: true },
  {
    key: 'bram',
    name: 'Bram Quillfeather',
    job: 'maintainer of wings, rail, rotors and machine tools',
    administrator: false,
  },
  {
    key: 'ines',
    name: 'Ines Hathersedge-Vold',
    job: 'maintainer of process, power, physiology and waters',
    administrator: false,
  },
  { key: 'tove', name: 'Tove Marrowby', job: 'contributor', administrator: false },
  { key: 'juno', name: 'Juno Skarlett-Pym', job: 'contributor', administrator: false },
  { key: 'anselm', name: 'Anselm Dreycott', job: 'contributor', administrator: false },
  { key: 'kezia', name: 'Kezia Bolderwick', job: 'contributor', administrator: false },
  { key: 'rufus', name: 'Rufus Ember-Lowe', job: 'contributor, test engineer', administrator: false },
  { key: 'maud', name: 'Maud Perricane', job: 'reader, operator', administrator: false },
  { key: 'idris', name: 'Idris Calloway-Thorne', job: 'reader, safety', administrator: false },
] as const
export type PersonKey = (typeof people)[number]['key']

/** The address is for signing in only; .example never leads anywhere (RFC 2606). */
export const emailOf = (key: PersonKey): string => `${key}@skellbeck.example`

export const groups: { name: string; slug: string; prefixes: string[]; members: [PersonKey, MemberRole][] }[] = [
  {
    name: 'Gullfoil Bench',
    slug: 'gullfoil-bench',
    prefixes: ['WNG'],
    members: [
      ['bram', 'maintainer'],
      ['ines', 'maintainer'],
      ['juno', 'contributor'],
      ['tove', 'contributor'],
      ['rufus', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Fellside Rail',
    slug: 'fellside-rail',
    prefixes: ['RUN', 'SHM'],
    members: [
      ['bram', 'maintainer'],
      ['tove', 'contributor'],
      ['anselm', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Tarn Street Process',
    slug: 'tarn-street-process',
    prefixes: ['RCT', 'CMB'],
    members: [
      ['ines', 'maintainer'],
      ['bram', 'maintainer'],
      ['kezia', 'contributor'],
      ['anselm', 'contributor'],
      ['tove', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Whorl Shop',
    slug: 'whorl-shop',
    prefixes: ['ROT', 'SRG'],
    members: [
      ['bram', 'maintainer'],
      ['juno', 'contributor'],
      ['rufus', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Harbour Busbar',
    slug: 'harbour-busbar',
    prefixes: ['GRD'],
    members: [
      ['ines', 'maintainer'],
      ['kezia', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Slideway Bench',
    slug: 'slideway-bench',
    prefixes: ['CUT'],
    members: [
      ['bram', 'maintainer'],
      ['anselm', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Pulse Room',
    slug: 'pulse-room',
    prefixes: ['BRE', 'NEU'],
    members: [
      ['ines', 'maintainer'],
      ['kezia', 'contributor'],
      ['idris', 'reader'],
    ],
  },
  {
    name: 'Reedmere Waters',
    slug: 'reedmere-waters',
    prefixes: ['ECO'],
    members: [
      ['ines', 'maintainer'],
      ['kezia', 'contributor'],
      ['maud', 'reader'],
      ['idris', 'reader'],
    ],
  },
]

/** What happened to a page, in order. `model` is a file in ./models; times are days before the library was loaded. */
export type Event =
  | { act: 'edit'; model: string; by: PersonKey; daysAgo: number }
  | { act: 'send'; summary: string; by: PersonKey; daysAgo: number }
  | { act: 'approve'; by: PersonKey; daysAgo: number }
  | { act: 'return'; remark: string; line?: number; symbol?: string; by: PersonKey; daysAgo: number }

export interface DemonstrationSource {
  type: 'report' | 'document' | 'dataset'
  title: string
  year: string
  publisher: string
  /** Who put it on the page and when; whoever made the page, with the page, unless told. */
  since?: { by: PersonKey; daysAgo: number }
  /** Where it is attached besides the page. */
  parameter?: { symbol: string; label: 'table' | 'page' | 'section' | 'equation'; locator: string; quoted?: string }
}

export const pages: {
  code: string
  group: string
  access: ReadAccess
  model: string
  by: PersonKey
  daysAgo: number
  sources: DemonstrationSource[]
  story: Event[]
}[] = [
  {
    code: 'WNG-01',
    group: 'gullfoil-bench',
    access: 'signed-in',
    model: 'wng-01-old',
    by: 'tove',
    daysAgo: 61,
    sources: [
      {
        type: 'report',
        title: 'Ground vibration test of the Gullfoil section',
        year: '2026',
        publisher: 'Gullfoil Bench',
        parameter: { symbol: 'ka', label: 'table', locator: '3', quoted: '14.0' },
      },
      {
        type: 'report',
        title: 'Static pull on the worn pitch bearing',
        year: '2026',
        publisher: 'Gullfoil Bench',
        since: { by: 'juno', daysAgo: 19 },
        parameter: { symbol: 'k3', label: 'section', locator: '4.2' },
      },
    ],
    story: [
      { act: 'send', summary: 'First model of the section, bearing as drawn', by: 'tove', daysAgo: 58 },
      { act: 'approve', by: 'bram', daysAgo: 56 },
      { act: 'edit', model: 'wng-01', by: 'juno', daysAgo: 19 },
      {
        act: 'send',
        summary: 'Sign of the cubic stiffness put right after the static pull: the worn bearing softens',
        by: 'juno',
        daysAgo: 18,
      },
      { act: 'approve', by: 'bram', daysAgo: 17 },
    ],
  },
  {
    code: 'RUN-03',
    group: 'fellside-rail',
    access: 'group',
    model: 'run-03',
    by: 'tove',
    daysAgo: 47,
    sources: [
      {
        type: 'report',
        title: 'Conicity of turned and worn treads, workshop measurements',
        year: '2025',
        publisher: 'Fellside Rail',
        parameter: { symbol: 'lam', label: 'table', locator: '2', quoted: '0.14' },
      },
    ],
    story: [
      { act: 'send', summary: 'Single-axle unit with conicity that grows with excursion', by: 'tove', daysAgo: 45 },
      { act: 'approve', by: 'bram', daysAgo: 43 },
    ],
  },
  {
    code: 'RCT-02',
    group: 'tarn-street-process',
    access: 'group',
    model: 'rct-02-old',
    by: 'kezia',
    daysAgo: 52,
    sources: [
      {
        type: 'report',
        title: 'Calorimetry of the nitration step, second series',
        year: '2026',
        publisher: 'Tarn Street Process',
        since: { by: 'anselm', daysAgo: 3 },
        parameter: { symbol: 'Bh', label: 'table', locator: '1' },
      },
    ],
    story: [
      { act: 'send', summary: 'Scaled tank with the heat of reaction of the first series', by: 'kezia', daysAgo: 50 },
      { act: 'approve', by: 'ines', daysAgo: 48 },
      { act: 'edit', model: 'rct-02', by: 'anselm', daysAgo: 3 },
      { act: 'send', summary: 'Heat of reaction corrected after the second series', by: 'anselm', daysAgo: 2 },
    ],
  },
  {
    code: 'CMB-05',
    group: 'tarn-street-process',
    access: 'signed-in',
    model: 'cmb-05',
    by: 'anselm',
    daysAgo: 33,
    sources: [
      {
        type: 'document',
        title: 'Flame response of the can, loudspeaker tests',
        year: '2026',
        publisher: 'Tarn Street Process',
        parameter: { symbol: 'tau', label: 'section', locator: '2' },
      },
    ],
    story: [
      { act: 'send', summary: 'One acoustic mode with a lagging flame', by: 'anselm', daysAgo: 31 },
      { act: 'approve', by: 'ines', daysAgo: 30 },
    ],
  },
  {
    code: 'SRG-04',
    group: 'whorl-shop',
    access: 'group',
    model: 'srg-04',
    by: 'juno',
    daysAgo: 5,
    sources: [],
    story: [],
  },
  {
    code: 'ROT-01',
    group: 'whorl-shop',
    access: 'open',
    model: 'rot-01',
    by: 'juno',
    daysAgo: 40,
    sources: [
      { type: 'dataset', title: 'Rotor run-ups and run-downs, spring series', year: '2026', publisher: 'Whorl Shop' },
    ],
    story: [
      {
        act: 'send',
        summary: 'Rotor with outer damping that falls and comes back with the orbit',
        by: 'juno',
        daysAgo: 38,
      },
      { act: 'approve', by: 'bram', daysAgo: 36 },
    ],
  },
  {
    code: 'GRD-07',
    group: 'harbour-busbar',
    access: 'open',
    model: 'grd-07',
    by: 'kezia',
    daysAgo: 28,
    sources: [],
    story: [
      { act: 'send', summary: 'Constant-power load behind a filter', by: 'kezia', daysAgo: 27 },
      { act: 'approve', by: 'ines', daysAgo: 25 },
    ],
  },
  {
    code: 'CUT-06',
    group: 'slideway-bench',
    access: 'group',
    model: 'cut-06',
    by: 'anselm',
    daysAgo: 9,
    sources: [],
    story: [],
  },
  {
    code: 'SHM-02',
    group: 'fellside-rail',
    access: 'signed-in',
    model: 'shm-02',
    by: 'anselm',
    daysAgo: 24,
    sources: [
      {
        type: 'report',
        title: 'Relaxation length of the nose tyre',
        year: '2025',
        publisher: 'Fellside Rail',
        parameter: { symbol: 'sig', label: 'table', locator: '1' },
      },
    ],
    story: [
      { act: 'send', summary: 'Castering leg with tyre lag', by: 'anselm', daysAgo: 22 },
      { act: 'approve', by: 'bram', daysAgo: 21 },
    ],
  },
  {
    code: 'BRE-01',
    group: 'pulse-room',
    access: 'group',
    model: 'bre-01',
    by: 'kezia',
    daysAgo: 20,
    sources: [],
    story: [
      { act: 'send', summary: 'Two mixing stages stand for the circulation lag', by: 'kezia', daysAgo: 18 },
      { act: 'approve', by: 'ines', daysAgo: 16 },
    ],
  },
  {
    code: 'NEU-03',
    group: 'pulse-room',
    access: 'group',
    model: 'neu-03',
    by: 'kezia',
    daysAgo: 15,
    sources: [],
    story: [
      { act: 'send', summary: 'Two populations with the drive as control', by: 'kezia', daysAgo: 13 },
      {
        act: 'return',
        remark: 'Both time constants have no source. Name where they come from, or mark them as assumed.',
        symbol: 'te',
        by: 'ines',
        daysAgo: 12,
      },
    ],
  },
  {
    code: 'ECO-02',
    group: 'reedmere-waters',
    access: 'open',
    model: 'eco-02',
    by: 'kezia',
    daysAgo: 35,
    sources: [
      {
        type: 'dataset',
        title: 'Enrichment series of the north tanks',
        year: '2026',
        publisher: 'Reedmere Waters',
        parameter: { symbol: 'K', label: 'page', locator: '7' },
      },
    ],
    story: [
      { act: 'send', summary: 'Grazers on algae, enrichment as control', by: 'kezia', daysAgo: 34 },
      { act: 'approve', by: 'ines', daysAgo: 32 },
    ],
  },
]

/** A model document of ./models, unparsed. */
export function readDemonstrationModel(name: string): unknown {
  const parsed: unknown = JSON.parse(readFileSync(new URL(`./models/${name}.json`, import.meta.url), 'utf8'))
  return parsed
}
