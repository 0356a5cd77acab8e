//! Owns the wish to stop: the flag that a first SIGINT or SIGTERM raises, and the immediate end at
//! the second.
//!
//! It never stops anything itself: whoever works looks at the flag.

use std::io;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};

use signal_hook::consts::{SIGINT, SIGTERM};
use signal_hook::flag;

/// Tells everything that works on one run to stop. Clones share the flag.
#[derive(Debug, Clone, Default)]
pub struct StopFlag {
    raised: Arc<AtomicBool>,
    /// The signal that raised it; 0 if none did.
    signal: Arc<AtomicUsize>,
}

impl StopFlag {
    /// A flag that nothing but [`StopFlag::raise`] and [`StopFlag::cancel`] raises.
    pub fn new() -> Self {
        StopFlag::default()
    }

    /// Lets SIGINT and SIGTERM raise the flag, and end the process at once (exit status 130 or 143)
    /// when it is up already. The journal needs no farewell, so that is safe at any moment.
    pub fn listen(&self) -> io::Result<()> {
        for signal in [SIGINT, SIGTERM] {
            // In this order: actions run as registered, so the first signal finds the flag down.
            flag::register_conditional_shutdown(signal, 128 + signal, Arc::clone(&self.raised))?;
            flag::register_usize(signal, Arc::clone(&self.signal), signal as usize)?;
            flag::register(signal, Arc::clone(&self.raised))?;
        }
        Ok(())
    }

    /// Raises the flag as `signal` would.
    pub fn raise(&self, signal: i32) {
        self.signal
            .store(usize::try_from(signal).unwrap_or(0), Ordering::SeqCst);
        self.raised.store(true, Ordering::SeqCst);
    }

    /// Raises the flag for another reason than a signal: a failure elsewhere in the run.
    pub fn cancel(&self) {
        self.raised.store(true, Ordering::SeqCst);
    }

    /// Whether to stop. Cheap enough for every step of an integration.
    pub fn is_raised(&self) -> bool {
        self.raised.load(Ordering::Relaxed)
    }

    /// The signal that asked to stop.
    pub fn signal(&self) -> Option<i32> {
        match self.signal.load(Ordering::SeqCst) {
            0 => None,
            signal => i32::try_from(signal).ok(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Set in the child process that plays the run.
    const CHILD: &str = "FROSTCLOCK_TEST_SIGNALLED_CHILD";

    /// If it failed, a first Ctrl-C would kill the run instead of asking it to stop, or a second one
    /// would not end it.
    #[test]
    fn the_first_signal_asks_and_the_second_ends() {
        if std::env::var_os(CHILD).is_some() {
            let stop = StopFlag::new();
            stop.listen().expect("listens");
            assert!(!stop.is_raised() && stop.signal().is_none());
            signal_hook::low_level::raise(SIGTERM).expect("raises");
            assert!(stop.is_raised());
            assert_eq!(stop.signal(), Some(SIGTERM));
            signal_hook::low_level::raise(SIGINT).expect("raises");
            unreachable!("the second signal did not end the process");
        }
        let test = "run::signals::tests::the_first_signal_asks_and_the_second_ends";
        let child = std::process::Command::new(std::env::current_exe().expect("this test"))
            .args(["--exact", test])
            .env(CHILD, "1")
            .output()
            .expect("runs");
        let said = String::from_utf8_lossy(&child.stdout);
        assert_eq!(child.status.code(), Some(130), "the child said: {said}");
    }
}
