// A delimited file of 601 points read whole (format and dialect worked out, every number checked) against bare csv-parse on the
// same bytes, in one run, turn by turn. `npm run bench -- text`. Limit: twice the time of csv-parse.
import { parse } from 'csv-parse/sync'
import { readSpectra } from '../../dist/readers/index.js'

const POINTS = 601
const LIMIT = 2
const WARM_UP = 200
const TURNS = 301

const rows = (write) =>
  Array.from({ length: POINTS }, (_, i) => write(300 + i, 0.05 + 0.4 * Math.exp(-(((i - 200) / 60) ** 2))))
const german = (v) => String(v).replace('.', ',')

const FILES = {
  'comma, point': [',', ['Wavelength (nm),Absorbance', ...rows((nm, a) => `${nm},${a.toFixed(6)}`)]],
  'semicolon, decimal comma, header': [
    ';',
    [
      // csv-parse is slow on rows of unequal length, which would flatter
      ...['Probe;CR-7', 'Datum;02.03.2026', 'Uhrzeit;09:15:30', 'Schichtdicke;10 mm', 'Wellenlänge [nm];Extinktion'],
      ...rows((nm, a) => `${german(nm.toFixed(1))};${german(a.toFixed(5))}`),
    ],
  ],
  'tab, exponents': ['\t', ['nm\tA', ...rows((nm, a) => `${nm.toFixed(2)}\t${a.toExponential(5)}`)]],
  quoted: [',', ['"nm","absorbance"', ...rows((nm, a) => `"${nm}","${a.toFixed(6)}"`)]],
  'seven ordinates': [
    ',',
    [
      `nm,${[1, 2, 3, 4, 5, 6, 7].map((k) => `S-${k} absorbance`).join()}`,
      ...rows((nm, a) => [nm, ...[1, 2, 3, 4, 5, 6, 7].map((k) => (a / k).toFixed(6))].join()),
    ],
  ],
}

const median = (values) => values.sort((a, b) => a - b)[values.length >> 1]
const timed = (work) => {
  const began = performance.now()
  work()
  return performance.now() - began
}

/** Prints the ratio for each file. */
export const run = () => {
  let worst = 0
  for (const [name, [delimiter, lines]] of Object.entries(FILES)) {
    const bytes = Buffer.from(`${lines.join('\n')}\n`)
    const bare = () => parse(bytes, { delimiter })
    const whole = () => {
      // another object each time: what is kept of a file that was decoded must not count
      const reading = readSpectra(bytes.subarray(), 'bench.csv', {})
      if (reading.kind !== 'read' || reading.spectra[0].x.length !== POINTS)
        throw new Error(JSON.stringify(reading.faults))
    }
    const [bareMs, wholeMs] = [[], []]
    for (let turn = -WARM_UP; turn < TURNS; turn++) {
      const [a, b] = [timed(bare), timed(whole)]
      if (turn >= 0) {
        bareMs.push(a)
        wholeMs.push(b)
      }
    }
    const [reference, own] = [median(bareMs), median(wholeMs)]
    worst = Math.max(worst, own / reference)
    console.log(
      `${(own / reference).toFixed(2).padStart(6)} × csv-parse (${own.toFixed(3)} ms against ${reference.toFixed(3)} ms)  ${name}`,
    )
  }
  console.log(`slowest ${worst.toFixed(2)} × csv-parse, limit ${LIMIT}`)
  if (worst > LIMIT) process.exitCode = 1
}
