//! The system calls that a folder of models depends on, and how each of them can fail.
//!
//! Chosen are the calls that take a path or a descriptor and that reading, writing, scanning, locking and the records are made of. What
//! touches no file of the folder (memory, threads, the loader, the clock) cannot leave anything half done there.

use nix::errno::Errno;

/// Where a call says which file it is about: the position of an argument.
#[derive(Clone, Copy)]
pub(crate) enum About {
    /// A path.
    Path(usize),
    /// A descriptor.
    Descriptor(usize),
    /// A path below a folder's descriptor, or the descriptor itself where the path is empty.
    Below(usize, usize),
}

/// A system call by its number on x86-64.
pub(crate) struct Call {
    pub(crate) number: u64,
    pub(crate) name: &'static str,
    pub(crate) about: About,
    /// Whether it puts something on the disk, which a full disk refuses.
    pub(crate) fills: bool,
    /// What it can fail with; see the manual page of each.
    pub(crate) errors: &'static [Errno],
}

const fn call(number: u64, name: &'static str, about: About, fills: bool, errors: &'static [Errno]) -> Call {
    Call { number, name, about, fills, errors }
}

const READ: &[Errno] = &[Errno::EIO];
const WRITE: &[Errno] = &[Errno::ENOSPC, Errno::EIO, Errno::EDQUOT, Errno::EFBIG];
const SYNC: &[Errno] = &[Errno::EIO, Errno::ENOSPC];
const LOOK: &[Errno] = &[Errno::EACCES, Errno::EIO];
const OPEN: &[Errno] = &[Errno::EACCES, Errno::ENOSPC, Errno::EMFILE, Errno::EIO];
const NAME: &[Errno] = &[Errno::EACCES, Errno::ENOSPC, Errno::EIO, Errno::EROFS];

/// The numbers are those of the kernel's `syscall_64.tbl`.
const CALLS: [Call; 28] = [
    call(0, "read", About::Descriptor(0), false, READ),
    call(1, "write", About::Descriptor(0), true, WRITE),
    call(2, "open", About::Path(0), false, OPEN),
    call(4, "stat", About::Path(0), false, LOOK),
    call(5, "fstat", About::Descriptor(0), false, READ),
    call(6, "lstat", About::Path(0), false, LOOK),
    call(17, "pread64", About::Descriptor(0), false, READ),
    call(18, "pwrite64", About::Descriptor(0), true, WRITE),
    call(73, "flock", About::Descriptor(0), false, &[Errno::ENOLCK]),
    call(74, "fsync", About::Descriptor(0), true, SYNC),
    call(75, "fdatasync", About::Descriptor(0), true, SYNC),
    call(77, "ftruncate", About::Descriptor(0), true, WRITE),
    call(82, "rename", About::Path(1), true, NAME),
    call(83, "mkdir", About::Path(0), true, NAME),
    call(87, "unlink", About::Path(0), false, LOOK),
    call(89, "readlink", About::Path(0), false, LOOK),
    call(90, "chmod", About::Path(0), false, LOOK),
    call(91, "fchmod", About::Descriptor(0), false, &[Errno::EPERM, Errno::EIO]),
    call(93, "fchown", About::Descriptor(0), false, &[Errno::EPERM]),
    call(217, "getdents64", About::Descriptor(0), false, READ),
    call(254, "inotify_add_watch", About::Path(1), false, &[Errno::ENOSPC, Errno::EACCES]),
    call(257, "openat", About::Below(0, 1), false, OPEN),
    call(258, "mkdirat", About::Below(0, 1), true, NAME),
    call(262, "newfstatat", About::Below(0, 1), false, LOOK),
    call(263, "unlinkat", About::Below(0, 1), false, LOOK),
    call(264, "renameat", About::Below(2, 3), true, NAME),
    call(316, "renameat2", About::Below(2, 3), true, NAME),
    call(332, "statx", About::Below(0, 1), false, LOOK),
];

/// The call of this number, if it is one of those.
pub(crate) fn by_number(number: u64) -> Option<&'static Call> {
    CALLS.iter().find(|call| call.number == number)
}
