import type { Command } from 'commander'
import { findConfigFolder } from '../config/index.ts'

export const addRun = (program: Command): void => {
  program
    .command('run')
    .summary('the daemon')
    .description(
      'Watches the drop folders, analyses what arrives, judges it and mails alarms, until it is told to stop.',
    )
    .option('--once', 'take in everything that waits, evaluate, try once to send what is due, and end')
    .option('--config <folder>', 'configuration folder')
    .addHelpText(
      'after',
      `
Example:
  tendq run --config /etc/tendq
  tendq run --once

SIGHUP, or a saved file, loads the configuration anew; SIGTERM and SIGINT stop the daemon.`,
    )
    .action(async (options: { once?: true; config?: string }) => {
      const { runDaemon, runOnce } = await import('../daemon/index.ts')
      const folder = findConfigFolder(options.config)
      await (options.once ? runOnce(folder) : runDaemon(folder))
    })
}
