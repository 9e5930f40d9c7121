/** Stands for an answer that did not come. */
export const noAnswer = (): Error => Object.assign(new Error('the file system does not answer'), { code: 'ETIMEDOUT' })

/**
 * The outcome of `work`, or a rejection after so many milliseconds. The work itself cannot be stopped: a call to a
 * dead share hangs in the kernel until the share is back.
 */
export const answerOf = async <T>(work: Promise<T>, timeoutMs: number, stopped: AbortSignal): Promise<T> => {
  let timer: NodeJS.Timeout | undefined
  let stop = (): void => {}
  const silence = new Promise<never>((_, reject) => {
    stop = () => reject(noAnswer())
    timer = setTimeout(stop, stopped.aborted ? 0 : timeoutMs)
    stopped.addEventListener('abort', stop)
  })
  try {
    return await Promise.race([work, silence])
  } finally {
    clearTimeout(timer)
    stopped.removeEventListener('abort', stop)
    silence.catch(() => {})
  }
}
