//! The exit status: one table for scripts to act on.

/// How a command ended. Of several, the highest concern wins: the order of the variants.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Status {
    Done,
    /// The goal was missed, a condition failed (accepted or not), or some points of a sweep found no start.
    Missed,
    /// Two records differ.
    Found,
    /// Interrupted by a signal, the disk or a lock; the same command goes on.
    Interrupted,
    /// Cannot be checked with this program or these inputs.
    Unchecked,
    /// The command line cannot be understood.
    Usage,
    /// The study or a file is at fault.
    Fault,
    /// The files of a finished run are not those it ended with.
    Broken,
    /// The program's own fault.
    Own,
}

impl Status {
    /// The number given to the shell.
    pub fn code(self) -> u8 {
        match self {
            Status::Done => 0,
            Status::Fault => 1,
            Status::Usage => 2,
            Status::Missed => 3,
            Status::Broken => 4,
            Status::Interrupted => 5,
            Status::Unchecked => 6,
            Status::Found => 7,
            Status::Own => 70,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Status;

    #[test]
    fn the_highest_concern_wins() {
        let rising = [0, 3, 7, 5, 6, 2, 1, 4, 70];
        let all = [
            Status::Done,
            Status::Missed,
            Status::Found,
            Status::Interrupted,
            Status::Unchecked,
            Status::Usage,
            Status::Fault,
            Status::Broken,
            Status::Own,
        ];
        assert_eq!(all.map(Status::code), rising);
        for (low, high) in all.iter().zip(&all[1..]) {
            assert_eq!(low.max(high), high);
        }
    }
}
