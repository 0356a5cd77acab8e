//! Owns what a run says about its progress: a bar on a terminal, a log line every so often
//! elsewhere.
//!
//! It never decides anything and never writes to stdout.

use std::time::{Duration, Instant};

use indicatif::{MultiProgress, ProgressBar, ProgressStyle};

use super::record::CellStatus;

/// Without a terminal: at least this long between two lines.
const BETWEEN_LINES: Duration = Duration::from_secs(60);
/// Without a terminal: a line at every such share of the cells as well.
const LINES_PER_RUN: usize = 10;

/// The progress of one run.
#[derive(Debug)]
pub struct Progress {
    bar: ProgressBar,
    /// Whether the bar shows; log lines otherwise.
    on_terminal: bool,
    tally: Tally,
    last_line: Instant,
    last_share: usize,
}

/// The numbers behind it.
#[derive(Debug, Clone, Copy)]
struct Tally {
    started: Instant,
    total: usize,
    /// Finished by an earlier run: they say nothing about the speed of this one.
    before: usize,
    now: usize,
    failed: usize,
}

impl Progress {
    /// Starts counting: `total` cells, `before` of them from an earlier run. `bars` is the set that
    /// the logger knows of, so that log lines do not tear the bar.
    pub fn start(bars: &MultiProgress, total: usize, before: usize) -> Self {
        let on_terminal = !bars.is_hidden();
        let bar = bars.add(ProgressBar::new(total as u64).with_position(before as u64));
        // The rate and the time left are ours: the bar's own would count the cells of an earlier run.
        let shape = "{bar:32} {elapsed}  {msg}";
        if let Ok(style) = ProgressStyle::with_template(shape) {
            bar.set_style(style);
        }
        if on_terminal {
            // Cells may take minutes: the time must go on between them.
            bar.enable_steady_tick(Duration::from_millis(500));
        }
        let started = Instant::now();
        let tally = Tally {
            started,
            total,
            before,
            now: 0,
            failed: 0,
        };
        Progress {
            bar,
            on_terminal,
            tally,
            last_line: started,
            last_share: 0,
        }
    }

    /// A cell has ended.
    pub fn cell(&mut self, status: CellStatus) {
        self.tally.now += 1;
        if status == CellStatus::Failed {
            self.tally.failed += 1;
        }
        self.bar
            .set_message(self.tally.line(self.tally.started.elapsed()));
        self.bar.inc(1);
        let done = self.tally.before + self.tally.now;
        let share = LINES_PER_RUN * done / self.tally.total.max(1);
        // The last line is `finish`'s.
        if !self.on_terminal
            && done < self.tally.total
            && (share > self.last_share || self.last_line.elapsed() >= BETWEEN_LINES)
        {
            log::info!("{}", self.tally.line(self.tally.started.elapsed()));
            self.last_line = Instant::now();
            self.last_share = share;
        }
    }

    /// Takes the bar away and gives the closing line.
    pub fn finish(self) -> String {
        self.bar.finish_and_clear();
        self.tally.line(self.tally.started.elapsed())
    }
}

impl Tally {
    fn line(&self, elapsed: Duration) -> String {
        let done = self.before + self.now;
        let mut line = format!("{done} of {} cells", self.total);
        if self.failed > 0 {
            line.push_str(&format!(", {} failed", self.failed));
        }
        let seconds = elapsed.as_secs_f64();
        if self.now > 0 && seconds > 0.0 {
            let rate = self.now as f64 / seconds;
            line.push_str(&match rate {
                1.0.. => format!(", {rate:.1} cells/s"),
                _ => format!(", {:.1} s per cell", 1.0 / rate),
            });
            if done < self.total {
                let left = (self.total - done) as f64 / rate;
                line.push_str(&format!(", {} left", in_words(left)));
            }
        }
        line
    }
}

/// A duration as a person says it: `40 s`, `3 min 20 s`, `2 h 5 min`.
fn in_words(seconds: f64) -> String {
    let seconds = seconds.round() as u64;
    match seconds {
        0..60 => format!("{seconds} s"),
        60..3600 => format!("{} min {} s", seconds / 60, seconds % 60),
        _ => format!("{} h {} min", seconds / 3600, seconds % 3600 / 60),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// If it failed, a resumed run would boast of cells it did not compute and promise too early
    /// an end.
    #[test]
    fn the_time_left_counts_only_cells_of_this_run() {
        let tally = Tally {
            started: Instant::now(),
            total: 100,
            before: 60,
            now: 10,
            failed: 1,
        };
        assert_eq!(
            tally.line(Duration::from_secs(100)),
            "70 of 100 cells, 1 failed, 10.0 s per cell, 5 min 0 s left"
        );
        let whole = Tally {
            now: 40,
            failed: 0,
            ..tally
        };
        assert_eq!(
            whole.line(Duration::from_secs(20)),
            "100 of 100 cells, 2.0 cells/s"
        );
        let idle = Tally {
            now: 0,
            failed: 0,
            ..tally
        };
        assert_eq!(idle.line(Duration::ZERO), "60 of 100 cells");
    }
}
