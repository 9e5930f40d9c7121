/**
 * How drawings look: ink on paper, one accent, everything told apart by its line and its mark and not by its colour
 * alone, so that a drawing says the same when it is printed in black and white. Contrast of text on paper is above 7:1.
 */
export const PAPER = '#fffdf8'
export const INK = '#22262b'
export const SOFT_INK = '#50565d'
export const HAIRLINE = '#c9c5bb'
export const SHADE = '#ebe7dc'
export const ACCENT = '#7a3b10'

export const FONT = "Georgia, 'DejaVu Serif', 'Liberation Serif', serif"
export const TEXT_PX = 13
export const SMALL_PX = 11.5

/** Dashes for the parts of a fit, in order; they repeat after the fourth. */
export const DASHES = ['7 3', '2 2.5', '9 3 2 3', '4 2 1 2'] as const
