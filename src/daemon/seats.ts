/** Lets at most `count` jobs run at a time; others wait in order. A job's own clock starts when it gets its seat. */
export const seats = (count: number) => {
  let free = count
  const waiting: (() => void)[] = []
  return async <Result>(job: () => Promise<Result>): Promise<Result> => {
    if (free > 0) free--
    else await new Promise<void>((resolve) => waiting.push(resolve))
    try {
      return await job()
    } finally {
      const next = waiting.shift()
      if (next === undefined) free++
      else next()
    }
  }
}
