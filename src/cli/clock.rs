//! Times of the stages of a run; knows no stage itself.

use super::options::Options;
use gapwright::report::StageTimes;
use std::time::Instant;

/// Laps of the run.
pub struct Clock {
    last: Instant,
    times: StageTimes,
}

impl Clock {
    /// Starts the first lap.
    pub fn start() -> Clock {
        Clock { last: Instant::now(), times: StageTimes::default() }
    }

    /// Adds the time since the last lap to `stage`.
    pub fn lap(&mut self, stage: &str) {
        let now = Instant::now();
        let seconds = (now - self.last).as_secs_f64();
        match self.times.stages.iter_mut().find(|(name, _)| name == stage) {
            Some((_, sum)) => *sum += seconds,
            None => self.times.stages.push((stage.to_string(), seconds)),
        }
        self.last = now;
    }
    /// The laps so far, when `--timings` asks for them.
    pub fn asked(&self, options: &Options) -> Option<StageTimes> {
        options.timings.then(|| self.times.clone())
    }
}
