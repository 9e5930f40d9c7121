/** A job that runs once at a time; a kick during a run makes one more follow. The job must not throw. */
export const singleFlight = (job: () => Promise<void>) => {
  let running: Promise<void> | null = null
  let again = false
  const run = (): Promise<void> => {
    if (running !== null) {
      again = true
      return running
    }
    running = (async () => {
      do {
        again = false
        await job()
      } while (again)
      running = null
    })()
    return running
  }
  return {
    run,
    kick: (): void => void run(),
    /** Resolves when nothing runs any more. */
    idle: (): Promise<void> => running ?? Promise.resolve(),
  }
}
