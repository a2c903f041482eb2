//! Whether the disk has room for a run, asked before its first draw.

use super::fault::RecordFault;
use super::frame::{HEAD, HEADER};
use crate::engine::Task;
use crate::plan::BurnIn;
use std::path::Path;

/// Left free for the other files of a folder and for whoever else uses the disk.
const SPARE: f64 = 16.0 * 1024.0 * 1024.0;

/// Bytes that a run writes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Needs {
    /// Up to the first review of every point.
    pub least: f64,
    /// When burn-in and draws go as far as they may.
    pub most: f64,
}

/// Bytes that the journal of these tasks takes.
pub fn needs(tasks: &[Task]) -> Needs {
    let mut needs = Needs {
        least: HEAD as f64,
        most: HEAD as f64,
    };
    for task in tasks {
        let (shortest, longest) = match task.burn_in {
            BurnIn::Fixed(draws) => (draws, draws),
            BurnIn::Chosen { from, at_most } => (from, at_most),
        };
        let bytes = |draws: u64| {
            let payload = draws as f64 * 8.0 * task.model.quantities().len() as f64;
            let blocks = (draws as f64 / task.block as f64).ceil();
            payload + blocks * (HEADER + task.model.state_size()) as f64
        };
        let chains = task.chains.len() as f64;
        let reviews = &task.reviews;
        let (first, last) = (reviews[0], reviews[reviews.len() - 1]);
        needs.least += chains * (bytes(shortest) + bytes(first));
        needs.most += chains * (bytes(longest) + bytes(last));
    }
    needs
}

/// Refuses a run that the disk under `path` has no room for, up to the first reviews. Gives a warning where
/// there is none for the longest that it may become. `stands`: bytes of the journal so far.
pub fn check(path: &Path, needs: Needs, stands: u64) -> Result<Option<String>, RecordFault> {
    let disk = rustix::fs::statvfs(path)
        .map_err(|fault| RecordFault::disk("ask the room left under", path, &fault.into()))?;
    let free = disk.f_bavail as f64 * disk.f_frsize as f64;
    let missing = |bytes: f64| bytes - stands as f64 + SPARE > free;
    let words = |until: &str, bytes: f64| {
        format!(
            "{until} this run writes {} under {}, where {} are free",
            size(bytes),
            path.display(),
            size(free)
        )
    };
    if missing(needs.least) {
        return Err(RecordFault::Disk(words(
            "up to its first review",
            needs.least,
        )));
    }
    Ok(missing(needs.most).then(|| words("at its longest", needs.most)))
}

/// Bytes in words: `3.2 MB`.
pub fn size(bytes: f64) -> String {
    let mut value = bytes;
    for unit in ["bytes", "kB", "MB", "GB", "TB"] {
        if value < 1000.0 {
            return match unit {
                "bytes" => format!("{value:.0} bytes"),
                _ => format!("{value:.1} {unit}"),
            };
        }
        value /= 1000.0;
    }
    format!("{value:.0} PB")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::engine::toy::{Planted, Toy};
    use std::path::Path;

    #[test]
    fn a_run_past_all_disks_is_refused_and_a_small_one_is_not() {
        let toy = Toy::new(0.5, Planted::Nothing);
        let here = Path::new(".");
        let huge = toy.task(1, 8, BurnIn::Fixed(0), &[1 << 50]);
        let told = check(here, needs(&[huge]), 0).unwrap_err().to_string();
        assert!(told.contains("up to its first review"), "{told}");
        let long = toy.task(1, 8, BurnIn::Fixed(0), &[100, 1 << 50]);
        assert!(check(here, needs(&[long]), 0).unwrap().is_some());
        let small = toy.task(1, 8, BurnIn::Fixed(0), &[100]);
        assert_eq!(check(here, needs(&[small]), 0), Ok(None));
    }

    #[test]
    fn sizes_in_words() {
        assert_eq!(size(999.0), "999 bytes");
        assert_eq!(size(3_200_000.0), "3.2 MB");
    }
}
