//! Telling a service manager how the daemon is: the protocol of `sd_notify(3)`, one datagram per word.

use std::ffi::{OsStr, OsString};
use std::io;
use std::os::linux::net::SocketAddrExt as _;
use std::os::unix::ffi::OsStrExt as _;
use std::os::unix::net::{SocketAddr, UnixDatagram};
use std::time::{Duration, Instant};

/// A service manager that wants to hear from us.
#[derive(Debug)]
pub struct Manager {
    socket: UnixDatagram,
    address: SocketAddr,
    /// How often it wants a sign of life, and when the next one is due.
    beat: Option<(Duration, Instant)>,
}

impl Manager {
    /// The manager that `variable`, which reads the environment, names; none where it names none.
    ///
    /// # Errors
    /// The address in NOTIFY_SOCKET cannot be used.
    pub fn named(now: Instant, variable: impl Fn(&str) -> Option<OsString>) -> io::Result<Option<Self>> {
        let Some(path) = variable("NOTIFY_SOCKET").filter(|path| !path.is_empty()) else { return Ok(None) };
        let address = match path.as_bytes() {
            // A name that is no file.
            [b'@', name @ ..] => SocketAddr::from_abstract_name(name)?,
            _ => SocketAddr::from_pathname(&path)?,
        };
        let socket = UnixDatagram::unbound()?;
        // A manager that does not listen must not stop the work.
        socket.set_nonblocking(true)?;
        let number = |name: &str| variable(name).as_deref().and_then(OsStr::to_str).and_then(|text| text.parse().ok());
        let meant = number("WATCHDOG_PID").is_none_or(|process: u64| process == u64::from(std::process::id()));
        let limit = number("WATCHDOG_USEC").filter(|&limit| meant && limit > 0).map(Duration::from_micros);
        Ok(Some(Self { socket, address, beat: limit.map(|limit| (limit / 2, now)) }))
    }

    /// The daemon is at work, or at work again with new settings.
    pub fn ready(&self) {
        self.tell("READY=1");
    }

    /// The settings are being read again. `now` is by the system's monotonic clock.
    pub fn reloading(&self, now: Duration) {
        self.tell(&format!("RELOADING=1\nMONOTONIC_USEC={}", now.as_micros()));
    }

    /// The daemon is ending.
    pub fn stopping(&self) {
        self.tell("STOPPING=1");
    }

    /// When the next sign of life is due.
    #[must_use]
    pub fn next(&self) -> Option<Instant> {
        self.beat.map(|(_, next)| next)
    }

    /// Gives a sign of life where one is due. Called by the loop that does the work, so that it stops when that does.
    pub fn beat(&mut self, now: Instant) {
        if let Some((every, next)) = &mut self.beat
            && *next <= now
        {
            *next = now + *every;
            self.tell("WATCHDOG=1");
        }
    }

    fn tell(&self, word: &str) {
        // There is nobody else to tell that it cannot be told.
        let _ = self.socket.send_to_addr(word.as_bytes(), &self.address);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_manager_hears_that_the_daemon_is_ready_and_lives() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("notify");
        let listener = UnixDatagram::bind(&path).unwrap();
        let heard = || {
            let mut buffer = [0; 100];
            let length = listener.recv(&mut buffer).unwrap();
            String::from_utf8(buffer[..length].to_vec()).unwrap()
        };
        let now = Instant::now();
        let variable = |name: &str| match name {
            "NOTIFY_SOCKET" => Some(path.clone().into_os_string()),
            "WATCHDOG_USEC" => Some("2000000".into()),
            _ => None,
        };
        let mut manager = Manager::named(now, variable).unwrap().unwrap();
        manager.ready();
        manager.beat(now);
        manager.beat(now + Duration::from_millis(999));
        manager.reloading(Duration::from_millis(7));
        manager.beat(now + Duration::from_millis(1000));
        manager.stopping();
        let words = ["READY=1", "WATCHDOG=1", "RELOADING=1\nMONOTONIC_USEC=7000", "WATCHDOG=1", "STOPPING=1"];
        assert_eq!(words.map(|_| heard()), words);
    }

    #[test]
    fn without_an_address_or_for_another_process_nothing_is_told() {
        let now = Instant::now();
        assert!(Manager::named(now, |_| None).unwrap().is_none());
        let other = |name: &str| match name {
            "NOTIFY_SOCKET" => Some("@millreeve-test".into()),
            "WATCHDOG_PID" => Some("1".into()),
            "WATCHDOG_USEC" => Some("2000000".into()),
            _ => None,
        };
        assert_eq!(Manager::named(now, other).unwrap().unwrap().next(), None);
        assert!(Manager::named(now, |_| Some("\0".into())).is_err());
    }
}
