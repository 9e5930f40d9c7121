/**
 * JCAMP-DX: a DIFDUP table of 3,500 points with every check on, per point; beside it JSON.parse of the same ordinates, which checks nothing.
 */
import { readSpectra } from '../../dist/readers/index.js'

const POINTS = 3500
const DIGITS = { sqz: '@ABCDEFGHI', sqzNegative: '@abcdefghi', dif: '%JKLMNOPQR', difNegative: '%jklmnopqr' }

const lettered = (value, positive, negative) => {
  const text = String(Math.abs(value))
  return (value < 0 ? negative : positive)[Number(text[0])] + text.slice(1)
}

const table = (ordinates, x) => {
  const lines = []
  for (let from = 0; from < ordinates.length - 1; ) {
    let line = `${x(from)}${lettered(ordinates[from], DIGITS.sqz, DIGITS.sqzNegative)}`
    let k = from + 1
    let last = null
    let times = 1
    const flush = () => {
      if (times > 1) line += 'STUVWXYZ'[times - 1]
      times = 1
    }
    for (; k < ordinates.length && line.length < 70; k++) {
      const step = ordinates[k] - ordinates[k - 1]
      if (step === last && times < 8) times++
      else {
        flush()
        line += lettered(step, DIGITS.dif, DIGITS.difNegative)
        last = step
      }
    }
    flush()
    lines.push(line)
    from = k - 1
  }
  lines.push(`${x(ordinates.length - 1)}${lettered(ordinates.at(-1), DIGITS.sqz, DIGITS.sqzNegative)}`)
  return lines.join('\n')
}

const nanoseconds = (call, points) => {
  for (let i = 0; i < 200; i++) call()
  const each = Array.from({ length: 25 }, () => {
    const from = performance.now()
    for (let i = 0; i < 20; i++) call()
    return ((performance.now() - from) / 20 / points) * 1e6
  })
  return each.sort((a, b) => a - b)[12]
}

/** Prints times and ratios. */
export const run = async () => {
  const step = 0.2
  const x = (i) => (200 + i * step).toFixed(1)
  const ordinates = Array.from({ length: POINTS }, (_, i) =>
    Math.round(5000 * Math.exp(-(((i - 1800) / 500) ** 2)) + 20 * Math.sin(i / 3)),
  )
  const text = `##TITLE= bench
##JCAMP-DX= 4.24
##DATA TYPE= UV/VIS SPECTRUM
##ORIGIN= lab.example
##OWNER= public domain
##XUNITS= NANOMETERS
##YUNITS= ABSORBANCE
##XFACTOR= 1
##YFACTOR= 0.0001
##FIRSTX= ${x(0)}
##LASTX= ${x(POINTS - 1)}
##DELTAX= ${step}
##NPOINTS= ${POINTS}
##FIRSTY= ${ordinates[0] * 1e-4}
##XYDATA= (X++(Y..Y))
${table(ordinates, x)}
##END=
`
  const bytes = new TextEncoder().encode(text)
  const reading = readSpectra(bytes, 'bench.jdx', {})
  if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
  const { y } = reading.spectra[0]
  if (ordinates.some((v, i) => Math.abs(v * 1e-4 - y[i]) > 1e-9)) throw new Error('not the ordinates that were written')
  // other bytes each time: what is kept of a file that was decoded must not count
  const own = nanoseconds(() => readSpectra(bytes.slice(), 'bench.jdx', {}), POINTS)
  const json = JSON.stringify(ordinates)
  const bare = nanoseconds(() => JSON.parse(json), POINTS)
  console.log(`jcamp: ${POINTS} points, DIFDUP, ${bytes.length} bytes, every check on`)
  console.log(`  read and checked   ${own.toFixed(1)} ns a point`)
  console.log(`  JSON.parse, bare   ${bare.toFixed(1)} ns a point: ratio ${(own / bare).toFixed(1)}`)
}
