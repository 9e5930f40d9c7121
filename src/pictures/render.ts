// A process of its own, for one picture: SVG comes in on standard input, PNG goes out on standard output. What the
// renderer takes of memory is given back when it ends, and if it hangs or crashes, the daemon does not.
import { createRequire } from 'node:module'
import { dirname, join } from 'node:path'
import { Resvg } from '@resvg/resvg-js'

// without a font of its own text would vanish without a word on a machine that has none
const fonts = join(dirname(createRequire(import.meta.url).resolve('dejavu-fonts-ttf/package.json')), 'ttf')

const chunks: Buffer[] = []
for await (const chunk of process.stdin) chunks.push(chunk as Buffer)
const picture = new Resvg(Buffer.concat(chunks).toString('utf8'), {
  font: {
    loadSystemFonts: false,
    fontFiles: ['DejaVuSerif.ttf', 'DejaVuSerif-Italic.ttf', 'DejaVuSerif-Bold.ttf'].map((file) => join(fonts, file)),
    defaultFontFamily: 'DejaVu Serif',
    serifFamily: 'DejaVu Serif',
  },
  fitTo: { mode: 'zoom', value: 2 }, // sharp on dense screens, and in print
})
process.stdout.write(picture.render().asPng())
