//! How the chains of a point are split into courses.

use std::ops::Range;

/// The most chains that a course carries in lockstep: a register of eight doubles.
pub const WIDEST: usize = 8;

/// Lanes for a run: as many as fill a register, fewer when threads would stand idle.
pub fn choose(threads: usize, points: usize, chains: usize) -> usize {
    let all = points.saturating_mul(chains);
    all.div_ceil(threads.max(1))
        .clamp(1, WIDEST.min(chains.max(1)))
}

/// Chains `0..chains` in consecutive courses of at most `lanes`, as even as can be.
pub fn split(chains: usize, lanes: usize) -> Vec<Range<usize>> {
    let courses = chains.div_ceil(lanes.max(1));
    (0..courses)
        .map(|course| course * chains / courses..(course + 1) * chains / courses)
        .collect()
}

/// The courses of a point's chains: those that have blocks behind them apart from those at their start, so that none
/// of them begins anew.
pub fn courses(begun: &[bool], lanes: usize) -> Vec<Range<usize>> {
    let mut courses = Vec::new();
    let mut from = 0;
    for alike in begun.chunk_by(|a, b| a == b) {
        let own = split(alike.len(), lanes).into_iter();
        courses.extend(own.map(|course| from + course.start..from + course.end));
        from += alike.len();
    }
    courses
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn courses_cover_all_chains_once() {
        for chains in 1..40 {
            for lanes in 1..12 {
                let courses = split(chains, lanes);
                let mut next = 0;
                for course in &courses {
                    assert_eq!(course.start, next);
                    assert!(!course.is_empty() && course.len() <= lanes);
                    next = course.end;
                }
                assert_eq!(next, chains);
            }
        }
    }

    #[test]
    fn chains_with_blocks_do_not_share_a_course_with_those_without() {
        let begun = [true, true, true, false, false];
        assert_eq!(courses(&begun, 8), [0..3, 3..5]);
        assert_eq!(courses(&begun, 2), [0..1, 1..3, 3..5]);
        assert_eq!(courses(&[false; 5], 4), split(5, 4));
        assert!(courses(&[], 4).is_empty());
    }

    #[test]
    fn threads_are_kept_busy_before_lanes_are_filled() {
        assert_eq!(choose(1, 1, 8), 8);
        assert_eq!(choose(2, 1, 8), 4);
        assert_eq!(choose(7, 1, 8), 2);
        assert_eq!(choose(64, 1, 8), 1);
        assert_eq!(choose(2, 100, 4), 4);
        assert_eq!(choose(2, 1, 100), 8);
    }
}
