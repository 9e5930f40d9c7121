/*
 * Which file system a folder lies on, from /proc/self/mountinfo: proc_pid_mountinfo(5). Changes that another machine
 * makes on a share raise no events here, so a share must be polled.
 */

export interface Mount {
  readonly mountPoint: string
  /** As the kernel names it: `ext4`, `nfs4`, `fuse.sshfs`. */
  readonly type: string
}

const withoutEscapes = (field: string): string =>
  field.replace(/\\([0-7]{3})/g, (_, octal: string) => String.fromCharCode(Number.parseInt(octal, 8)))

/** The mount that holds an absolute path without symbolic links; null if the text names none. */
export const mountOf = (mountinfo: string, path: string): Mount | null => {
  let best: Mount | null = null
  for (const line of mountinfo.split('\n')) {
    const [left, right] = line.split(' - ')
    const mountPoint = withoutEscapes(left?.split(' ')[4] ?? '')
    const type = right?.split(' ')[0] ?? ''
    if (mountPoint === '' || type === '') continue
    const holds = path === mountPoint || path.startsWith(mountPoint.endsWith('/') ? mountPoint : `${mountPoint}/`)
    // Of two mounts on one point the later line is on top.
    if (holds && (best === null || mountPoint.length >= best.mountPoint.length)) best = { mountPoint, type }
  }
  return best
}

const NETWORK = new Set(
  'nfs nfs4 cifs smb3 smbfs 9p afs ceph glusterfs lustre beegfs gfs2 ocfs2 orangefs davfs vboxsf vmhgfs prl_fs virtiofs'.split(
    ' ',
  ),
)

/** Whether other machines may write there without an event here. A program behind `fuse` may ask anyone, so it counts. */
export const isNetworkFileSystem = (type: string): boolean =>
  NETWORK.has(type) || type === 'fuse' || type.startsWith('fuse.')
