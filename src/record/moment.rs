//! Time and place of a run, for its circumstances; outside every digest.

use std::time::{SystemTime, UNIX_EPOCH};

/// The present moment in UTC, to the second: `2026-12-01T13:44:10Z`.
#[expect(
    clippy::disallowed_methods,
    reason = "circumstances; no digit sees the clock"
)]
pub fn now() -> String {
    let since = SystemTime::now().duration_since(UNIX_EPOCH);
    written(since.map_or(0, |since| since.as_secs()))
}

/// The name of this machine.
pub fn host() -> String {
    let names = rustix::system::uname();
    names.nodename().to_string_lossy().into_owned()
}

/// Seconds since 1970 as a date and time of the Gregorian calendar.
fn written(seconds: u64) -> String {
    let (days, rest) = (seconds / 86_400, seconds % 86_400);
    // Years counted from 1 March, so that the leap day ends a year; 400 years have 146,097 days.
    let shifted = days + 719_468;
    let (era, day) = (shifted / 146_097, shifted % 146_097);
    let year = (day - day / 1_460 + day / 36_524 - day / 146_096) / 365;
    let day_of_year = day - (365 * year + year / 4 - year / 100);
    let from_march = (5 * day_of_year + 2) / 153;
    let day = day_of_year - (153 * from_march + 2) / 5 + 1;
    let month = if from_march < 10 {
        from_march + 3
    } else {
        from_march - 9
    };
    let year = era * 400 + year + u64::from(month <= 2);
    let (hour, minute, second) = (rest / 3_600, rest / 60 % 60, rest % 60);
    format!("{year:04}-{month:02}-{day:02}T{hour:02}:{minute:02}:{second:02}Z")
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Dates from `date -u -d @N`.
    #[test]
    fn known_moments() {
        assert_eq!(written(0), "1970-01-01T00:00:00Z");
        assert_eq!(written(951_782_399), "2000-02-28T23:59:59Z");
        assert_eq!(written(951_782_400), "2000-02-29T00:00:00Z");
        assert_eq!(written(1_796_132_650), "2026-12-01T13:44:10Z");
        assert_eq!(written(4_107_542_400), "2100-03-01T00:00:00Z");
    }
}
