import { execFileSync } from 'node:child_process'
import { chmodSync, chownSync, existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createServer } from 'node:net'
import { join } from 'node:path'
import { makeCertificate } from './certificate.ts'

const NOBODY = 65_534

/** Why Debian's mail server cannot be started here; null where it can. */
export const whyNoPostfix = (): string | null => {
  if (!existsSync('/usr/sbin/postfix')) return 'postfix is not installed'
  return process.getuid?.() === 0 ? null : 'postfix can be started by root only'
}

const freePort = (): Promise<number> =>
  new Promise((resolve) => {
    const server = createServer().listen(0, '127.0.0.1', () => {
      const { port } = server.address() as { port: number }
      server.close(() => resolve(port))
    })
  })

/**
 * A Postfix of our own beside any other: it listens on the loopback, delivers to one file for keeper@lab.example, and
 * hands nothing on: no mail leaves this machine.
 */
export const startPostfix = async () => {
  const folder = mkdtempSync('/tmp/tendq-postfix-')
  const at = (name: string): string => join(folder, name)
  for (const name of ['conf', 'queue', 'data', 'mail']) mkdirSync(at(name))
  chmodSync(folder, 0o755)
  const postfixUser = Number(execFileSync('id', ['-u', 'postfix']).toString())
  chownSync(at('data'), postfixUser, 0)
  chownSync(at('mail'), NOBODY, NOBODY)
  const certificate = makeCertificate(folder)
  const port = await freePort()
  writeFileSync(
    at('conf/main.cf'),
    `compatibility_level = 3.6
queue_directory = ${at('queue')}
data_directory = ${at('data')}
command_directory = /usr/sbin
daemon_directory = /usr/lib/postfix/sbin
meta_directory = /etc/postfix
shlib_directory = /usr/lib/postfix
mail_owner = postfix
setgid_group = postdrop
inet_interfaces = 127.0.0.1
inet_protocols = ipv4
myhostname = mail.lab.example
mydestination =
mynetworks =
virtual_mailbox_domains = lab.example
virtual_mailbox_base = ${at('mail')}
virtual_mailbox_maps = inline:{ { keeper@lab.example = keeper } }
virtual_minimum_uid = 1
virtual_uid_maps = static:${NOBODY}
virtual_gid_maps = static:${NOBODY}
default_transport = error:nothing leaves this machine
relay_transport = error:nothing leaves this machine
smtpd_relay_restrictions = reject_unauth_destination
maillog_file = ${at('log')}
maillog_file_prefixes = /tmp
alias_maps =
alias_database =
${certificate === null ? '' : `smtpd_tls_security_level = may\nsmtpd_tls_cert_file = ${certificate.certFile}\nsmtpd_tls_key_file = ${certificate.keyFile}\n`}`,
  )
  writeFileSync(
    at('conf/master.cf'),
    `127.0.0.1:${port} inet n - n - - smtpd
pickup unix n - n 60 1 pickup
cleanup unix n - n - 0 cleanup
qmgr unix n - n 300 1 qmgr
tlsmgr unix - - n 1000? 1 tlsmgr
rewrite unix - - n - - trivial-rewrite
bounce unix - - n - 0 bounce
defer unix - - n - 0 bounce
trace unix - - n - 0 bounce
verify unix - - n - 1 verify
flush unix n - n 1000? 0 flush
proxymap unix - - n - - proxymap
error unix - - n - - error
retry unix - - n - - error
virtual unix - n n - - virtual
anvil unix - - n - 1 anvil
postlog unix-dgram n - n - 1 postlogd
`,
  )
  const postfix = (command: string): void => {
    execFileSync('/usr/sbin/postfix', ['-c', at('conf'), command], { stdio: 'ignore', timeout: 20_000 })
  }
  postfix('start')
  return {
    port,
    certificate,
    /** Messages as they lie in the mailbox (mbox: each begins with a line `From `). */
    mailbox: (): readonly string[] =>
      existsSync(at('mail/keeper'))
        ? readFileSync(at('mail/keeper'), 'utf8')
            .split(/^From .*\n/m)
            .filter((message) => message !== '')
        : [],
    stop: (): void => {
      postfix('stop')
      rmSync(folder, { recursive: true, force: true, maxRetries: 5 })
    },
  }
}
