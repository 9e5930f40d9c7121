import { type Logger, pino } from 'pino'

/** Synchronous: a line that was written is there, also when the process is ended the next instant. */
export const startLog = (level = process.env.TENDQ_LOG_LEVEL ?? 'info'): Logger =>
  pino({ level, base: null, timestamp: pino.stdTimeFunctions.isoTime }, pino.destination({ fd: 2, sync: true }))
