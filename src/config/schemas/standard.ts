import { z } from 'zod'
import { name, number, quantity, text } from '../pieces.ts'

/** `standards/*.yaml` */
export const standardSchema = z.strictObject({
  standard: name(),
  title: text().optional(),
  source: text().describe('Where the figures come from: the number and date of the certificate'),
  lines: z
    .array(
      z.strictObject({
        at: quantity('wavelength', 'positive').describe('Wavelength in air'),
        u: quantity('wavelength', 'positive').optional().describe('Its standard uncertainty (k = 1)'),
        absorbance: number().optional(),
        'u-absorbance': number({ least: 0, above: true }).optional(),
      }),
    )
    .min(1),
})

export type StandardFile = z.output<typeof standardSchema>
