//! File systems that tell nobody of what others do to them: edits there are found by scanning.

use std::io;
use std::path::Path;

use crate::store::Terms;

/// File systems over a network, or made by another program, by the number that `statfs` gives: from `linux/magic.h`, and from the
/// sources of those that are not in it.
const REMOTE: [(u32, &str); 16] = [
    (0x6969, "NFS"),
    (0x517b, "SMB"),
    (0xff53_4d42, "SMB"),
    (0xfe53_4d42, "SMB"),
    (0x0102_1997, "9P"),
    (0x6573_5546, "FUSE"),
    (0x5346_414f, "AFS"),
    (0x6b41_4653, "AFS"),
    (0x7375_7245, "Coda"),
    (0x00c3_6400, "Ceph"),
    (0x0bd0_0bd0, "Lustre"),
    (0x4750_4653, "GPFS"),
    (0x1983_0326, "BeeGFS"),
    (0x7461_636f, "OCFS2"),
    (0x0116_1970, "GFS2"),
    (0x786f_4256, "VirtualBox"),
];

/// The kind of file system that `path` lies on, if it is one whose events cannot be relied on.
///
/// # Errors
/// It cannot be looked at.
pub fn kind(path: &Path) -> io::Result<Option<&'static str>> {
    let about = rustix::fs::statfs(path)?;
    Ok(known(i128::from(about.f_type)))
}

/// The terms on which a folder is kept that other hosts may use too; none where it is this host's alone.
#[must_use]
pub fn terms(folder: &Path) -> Option<Terms> {
    Terms::pretended().or_else(|| matches!(kind(folder), Ok(Some(_))).then(Terms::of_this_host))
}

/// The name of a number; the system's type for it differs from machine to machine, in width and in sign.
fn known(number: i128) -> Option<&'static str> {
    let low = number & 0xffff_ffff;
    REMOTE.iter().find(|&&(magic, _)| i128::from(magic) == low).map(|&(_, name)| name)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn network_file_systems_are_known_by_their_numbers_and_local_ones_are_none() {
        assert_eq!(known(0x6969), Some("NFS"));
        assert_eq!(known(0xff53_4d42), Some("SMB"));
        // As a 32-bit machine has it.
        assert_eq!(known(i128::from(0xff53_4d42_u32.cast_signed())), Some("SMB"));
        // ext4, tmpfs, overlayfs, btrfs, xfs.
        for local in [0xef53, 0x0102_1994, 0x794c_7630, 0x9123_683e, 0x5846_5342] {
            assert_eq!(known(local), None, "{local:x}");
        }
        assert_eq!(kind(Path::new("/proc")).unwrap(), None);
        assert!(kind(Path::new("/none/such")).is_err());
    }
}
