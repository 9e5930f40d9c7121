/** The usual words for axes, ordinates and facts of a measurement in English, German, French and Spanish. */
import type { AxisUnit, OrdinateKind } from './types.ts'

/** Lower case, no accents, compatibility forms unfolded (`cm⁻¹` → `cm-1`, `µ` → `μ`), blanks single. */
export const plainWords = (text: string): string =>
  text
    .normalize('NFKD')
    .replace(/[\u0300-\u036f]/g, '')
    .replace(/[\u2212–‐‑]/g, '-')
    .replace(/[’´`]/g, "'")
    .replace(/[_\s]+/g, ' ')
    .trim()
    .toLowerCase()

const UNITS: readonly (readonly [AxisUnit | 'angstrom', RegExp])[] = [
  [
    'cm^-1',
    /\bcm ?\^? ?\(? ?-1\)?(?!\d)|\b1 ?\/ ?cm\b|\bwave ?numbers?\b|\bwellenzahl|\bnombres? d'? ?onde|\bnumeros? de onda/,
  ],
  ['nm', /\bnm\b|nanomet/],
  ['um', /(?<![a-z])[uμ]m\b|micromet|mikromet|\bmicrons?\b/],
  ['eV', /\bev\b|elektronenvolt|electron-? ?volts?|electron-?voltio/],
  ['angstrom', /\bangstroms?\b|\(a\)$(?<=(?:length|lange|onda|onde) \(a\))/],
]

const WAVELENGTH = /\bwave ?length|wellenlange|longueurs? d'? ?onde|longitud(?:es)? de onda|\blambda\b|λ|\bwl\b/
const ENERGY = /\b(?:photon )?energ(?:y|ie|ia)\b/

/** What a heading says of an axis: its units (one, or several that contradict), and the kind of quantity. */
export interface AxisWords {
  readonly units: readonly (AxisUnit | 'angstrom')[]
  readonly quantity: 'wavelength' | 'energy' | null
}

/** Reads the words of a heading that might name an axis. */
export const axisWords = (heading: string): AxisWords => {
  const text = plainWords(heading)
  return {
    units: UNITS.filter(([, word]) => word.test(text)).map(([unit]) => unit),
    quantity: WAVELENGTH.test(text) ? 'wavelength' : ENERGY.test(text) ? 'energy' : null,
  }
}

/** Quantities that resemble an ordinate and are none that can be fitted here. */
const OTHER =
  /derivat|ableitung|derivee|derivada|\blog\b|molar|epsilon|ε|coeffi|koeffi|coefi|\bcounts?\b|intensit|zahlrate|\bma(?:u|bs)\b|milli|baseline|\bdark\b|single ?beam/
const SIDE_COLUMN =
  /\b(?:sd|std|s\.d\.|stdev|sigma|error|err|uncertainty|unsicherheit|fehler|standardabweichung|incertitude|ecart-?type|incertidumbre|desviacion|noise|rauschen|n)\b|±|σ/

const PERCENT = /%|percent|prozent|pour ?cent|por ?ciento/
const KINDS: readonly (readonly ['absorbance' | 'transmittance' | 'reflectance' | 'kubelka-munk', RegExp])[] = [
  ['kubelka-munk', /kubelka|\bf ?\( ?r ?\)|\bk ?\/ ?s\b/],
  [
    'absorbance',
    /absorban[cz]|\babs\b|extinktion|extinction|\bext\b|densite optique|densidad optica|optical density|optische dichte|\bod\b|\bdo\b(?= ?\(|$)|absorptionsma/,
  ],
  ['transmittance', /transmit|transmission|% ?t\b|\bt ?\(? ?%|durchlassig/],
  ['reflectance', /reflect|reflekt|reflexion|remission|% ?r\b|\br ?\(? ?%/],
]
const SINGLE: Readonly<Record<string, 'absorbance' | 'transmittance' | 'reflectance'>> = {
  a: 'absorbance',
  au: 'absorbance',
  e: 'absorbance',
  t: 'transmittance',
  r: 'reflectance',
}

export type OrdinateWords =
  | { readonly kind: 'none' }
  | { readonly kind: 'other'; readonly word: string }
  | { readonly kind: 'side' }
  | {
      readonly kind: 'known'
      readonly quantity: 'absorbance' | 'transmittance' | 'reflectance' | 'kubelka-munk'
      readonly percent: boolean
    }
  | { readonly kind: 'several' }

/** Reads the words of a heading that might name an ordinate. `a.u.` says nothing: it is written for arbitrary units too. */
export const ordinateWords = (heading: string): OrdinateWords => {
  const text = plainWords(heading)
  const other = OTHER.exec(text)
  if (other) return { kind: 'other', word: other[0] }
  const found = KINDS.filter(([, word]) => word.test(text))
  if (found.length > 1) return { kind: 'several' }
  const bare =
    SINGLE[
      text
        .replace(/\s*[([].*[)\]]\s*$/, '')
        .replace(/^%|%$/g, '')
        .trim()
    ]
  const quantity = found[0]?.[0] ?? bare
  if (SIDE_COLUMN.test(text) && !(quantity !== undefined && /^n\b/.test(text))) return { kind: 'side' }
  return quantity === undefined ? { kind: 'none' } : { kind: 'known', quantity, percent: PERCENT.test(text) }
}

/** The kind of ordinate that words and the largest value agree on, or the two readings that remain. */
export const ordinateKind = (
  quantity: 'absorbance' | 'transmittance' | 'reflectance' | 'kubelka-munk',
  percent: boolean,
  largest: number,
):
  | { readonly kind: 'settled'; readonly y: OrdinateKind }
  | { readonly kind: 'open'; readonly readings: readonly OrdinateKind[]; readonly why: string } => {
  if (quantity === 'kubelka-munk')
    return largest <= 200
      ? { kind: 'settled', y: quantity }
      : { kind: 'open', readings: [], why: `a Kubelka–Munk value of ${largest}` }
  if (quantity === 'absorbance') {
    if (percent)
      return {
        kind: 'open',
        readings: ['absorbance', 'percent-transmittance'],
        why: 'a heading that says absorbance and percent',
      }
    if (largest <= 10) return { kind: 'settled', y: 'absorbance' }
    return {
      kind: 'open',
      readings: ['percent-transmittance', 'percent-reflectance'],
      why: `an absorbance of ${largest}`,
    }
  }
  const fraction = quantity
  const inPercent = `percent-${quantity}` as const
  if (largest > 200) return { kind: 'open', readings: [], why: `a ${quantity} of ${largest}` }
  if (percent) {
    if (largest > 1.2) return { kind: 'settled', y: inPercent }
    return {
      kind: 'open',
      readings: [inPercent, fraction],
      why: `a ${quantity} said to be in percent that never exceeds ${largest}`,
    }
  }
  if (largest <= 1.5) return { kind: 'settled', y: fraction }
  if (largest > 5) return { kind: 'settled', y: inPercent }
  return { kind: 'open', readings: [inPercent, fraction], why: `a ${quantity} of at most ${largest} without a unit` }
}

/** What a fact in a header is about. */
export type Fact =
  | 'sample'
  | 'title'
  | 'datetime'
  | 'date'
  | 'time'
  | 'path'
  | 'temperature'
  | 'concentration'
  | 'ordinate'
  | 'axis'
  | 'medium'

const FACTS: readonly (readonly [Fact, RegExp])[] = [
  [
    'datetime',
    /^(?:date ?(?:and|&|\/|,)? ?time|datum ?(?:und|\/|,)? ?(?:uhr)?zeit|date et heure|fecha y hora|measured(?: at| on)?|acquired(?: at| on)?|recorded(?: at| on)?|created(?: at| on)?|timestamp|gemessen(?: am)?|zeitstempel|mesure(?: le)?|medido(?: el)?|acquisition|collected)$/,
  ],
  ['date', /^(?:(?:measurement |acquisition |scan )?date|(?:mess)?datum|date de mesure|fecha(?: de medida)?)$/],
  [
    'time',
    /^(?:(?:measurement |acquisition |scan )?time|uhrzeit|messzeit|zeit|heure(?: de mesure)?|hora(?: de medida)?)$/,
  ],
  [
    'sample',
    /^(?:sample(?: name| id)?|specimen|probe(?:nname|nbezeichnung)?|echantillon|nom de l'echantillon|muestra|nombre de (?:la )?muestra)$/,
  ],
  ['title', /^(?:title|titel|titre|titulo|name|description|beschreibung|comment|kommentar|remark)$/],
  [
    'path',
    /^(?:(?:optical )?path ?length|path|cell(?: length| path)?|cuvette|schichtdicke|kuvette(?:nlange)?|trajet(?: optique)?|longueur de (?:cuve|trajet)|cuve|paso optico|camino optico|longitud de paso|cubeta)$/,
  ],
  [
    'temperature',
    /^(?:temp(?:erature|eratur|erature de mesure|eratura)?\.?|(?:sample|cell|block|probe|cell block) temp(?:erature)?|messtemperatur|probentemperatur)$/,
  ],
  ['concentration', /^(?:conc(?:entration|entracion|\.)?|konz(?:entration|\.)?|c)$/],
  [
    'ordinate',
    /^(?:y|y ?-?(?:axis|achse|unit|units|einheit|label)|eje y|axe y|ordinate|ordonnee|ordenada|(?:photometric |data |measurement )?mode|messmodus|messart|messgroße|messgrosse|mode de mesure|modo(?: de medida)?|quantity|grandeur|magnitud|y data)$/,
  ],
  ['axis', /^(?:x|x ?-?(?:axis|achse|unit|units|einheit|label)|eje x|axe x|abscissa|abszisse|abscisse|abscisa)$/],
  ['medium', /^(?:medium|wavelengths? (?:in|medium)|wellenlangen in)$/],
]

/** The fact a header key is about, or null. Units in brackets after the key are disregarded. */
export const factOf = (key: string): Fact | null => {
  const text = plainWords(key).replace(/\s*[([].*[)\]]\s*$/, '')
  return FACTS.find(([, word]) => word.test(text))?.[0] ?? null
}
