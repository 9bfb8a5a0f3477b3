//! What this host is called.

/// The name of this host, for messages.
pub(super) fn host() -> String {
    let known = ["/proc/sys/kernel/hostname", "/etc/hostname"];
    let name = known.iter().find_map(|path| std::fs::read_to_string(path).ok());
    name.map_or_else(|| "unknown".to_owned(), |name| name.trim().to_owned())
}
