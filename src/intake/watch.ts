import { relative, sep } from 'node:path'
import { watch as chokidarWatch } from 'chokidar'
import type { Watch } from './types.ts'

/**
 * Watches folders, not files: one watch per folder however many files lie in it. What changed in a folder comes as
 * the raw event of its watch, with the name.
 */
export const watchFolder: Watch = (folder, recursive, hears) => {
  const watcher = chokidarWatch(folder, {
    ignored: (_path, stats) => stats !== undefined && !stats.isDirectory(),
    ignoreInitial: true,
    followSymlinks: false,
    ignorePermissionErrors: true, // the scan reports them
    usePolling: false, // whatever the environment asks for: the scan does the polling
    ...(recursive ? {} : { depth: 0 }),
  })
  const hint = (path: string): void => hears.hint(relative(folder, path).split(sep).join('/'))
  watcher.on('raw', (_event, name, details: unknown) => {
    const watched = (details as { watchedPath?: unknown } | null)?.watchedPath
    if (typeof watched !== 'string' || typeof name !== 'string') hears.hint('')
    else hint(`${watched}${sep}${name}`)
  })
  watcher.on('addDir', hint)
  watcher.on('unlinkDir', hint)
  watcher.on('error', (error) => hears.failed(error))
  watcher.on('ready', () => hears.ready())
  return { close: () => watcher.close() }
}
