import { availableParallelism } from 'node:os'
import { Piscina } from 'piscina'
import type { Reading } from '../readers/types.ts'
import { seats } from './seats.ts'
import type { FitJob, FitResult, ReadJob } from './worker.ts'

/** A job that ended without a result: it hung past its time, or its thread died. The pool goes on. */
export interface WorkerFailure {
  readonly kind: 'failed'
  readonly why: string
}

export interface Pool {
  read(job: ReadJob): Promise<Reading | WorkerFailure>
  fit(job: FitJob): Promise<FitResult | WorkerFailure>
  stop(): Promise<void>
}

/** Longest time that reading or fitting one file may take. */
const TIME_LIMIT_MS = 60_000

/** Memory that one worker may take before it is ended in place of the daemon, MiB. */
const WORKER_MEMORY_MB = 512

/** Reading and fitting happen in worker threads, so that nothing a file holds can stop the daemon. */
export const startPool = ({
  threads = Math.min(4, availableParallelism()),
  timeLimitMs = TIME_LIMIT_MS,
  worker = new URL('./worker.js', import.meta.url),
} = {}): Pool => {
  const pool = new Piscina({
    filename: worker.href,
    minThreads: 1,
    maxThreads: threads,
    idleTimeout: 30_000,
    resourceLimits: { maxOldGenerationSizeMb: WORKER_MEMORY_MB },
  })

  const seated = seats(threads)

  const run = async <Result>(name: 'read' | 'fit', job: ReadJob | FitJob): Promise<Result | WorkerFailure> => {
    // set when the job begins: what waits behind a file that hangs must not be condemned with it
    const limit = AbortSignal.timeout(timeLimitMs)
    try {
      return (await pool.run(job, { name, signal: limit })) as Result
    } catch (error) {
      const why = limit.aborted
        ? `took longer than ${timeLimitMs / 1000} s and was stopped`
        : `the worker failed: ${error instanceof Error ? error.message : String(error)}`
      return { kind: 'failed', why }
    }
  }

  return {
    read: (job) => seated(() => run<Reading>('read', job)),
    fit: (job) => seated(() => run<FitResult>('fit', job)),
    stop: () => pool.destroy(),
  }
}
