//! The reasons that stand beside a figure, or in its place.

use std::fmt;

/// Why a figure does not exist, or what to know before believing it. Chains count from 1 in words and
/// from 0 in code.
#[derive(Debug, Clone, PartialEq)]
pub enum Note {
    NoDraws,
    TooManyDraws,
    /// Draws that are not numbers.
    NotANumber {
        count: u64,
        of: u64,
    },
    /// Draws that are infinite.
    Infinite {
        count: u64,
        of: u64,
    },
    /// Every draw is this value.
    Constant {
        value: f64,
    },
    /// Each chain stands at a point of its own.
    AllStuck,
    /// Chains that never left one point while the others moved.
    Stuck {
        chains: Vec<usize>,
    },
    /// Chains whose mean lies more than five errors from that of the others.
    Stray {
        chains: Vec<usize>,
        of: usize,
        errors: f64,
    },
    /// R-hat above 1.1.
    Disagree {
        r_hat: f64,
    },
    /// All but a few draws are this value; not a condition.
    NearlyConstant {
        value: f64,
        others: u64,
        of: u64,
    },
    /// A condition seen (or missed) too rarely for an ordinary error. `limits`: 95 % limits of its
    /// probability (Clopper & Pearson 1934 on effective counts), once [`super::settle`] has found them.
    Rare {
        seen: u64,
        of: u64,
        effective: Option<f64>,
        limits: Option<(f64, f64)>,
    },
    /// The tail is too heavy for an error of the mean (index from 0.5 on), or for a mean (from 1 on).
    HeavyTail {
        index: f64,
    },
    /// Too few draws a chain.
    Short {
        draws: u64,
        needed: u64,
    },
    OneChain,
    /// So small an effective size that its own error is large.
    FewEffective {
        size: f64,
    },
    /// The chains do not tell the same story yet.
    NotMixed {
        r_hat: f64,
    },
    /// A goal of digits asks for figures that have no error, and so does not bind them.
    Unjudged {
        figures: Vec<String>,
    },
    /// Neighbouring order statistics tie, so that these quantiles have no error of this kind.
    Ties {
        levels: Vec<f64>,
    },
}

impl Note {
    /// Do the chains stand still or disagree, so that no error is given?
    pub fn is_disagreement(&self) -> bool {
        matches!(
            self,
            Note::AllStuck | Note::Stuck { .. } | Note::Stray { .. } | Note::Disagree { .. }
        )
    }

    /// Is it about a quantity that always, or nearly always, had one value?
    pub fn is_seldom(&self) -> bool {
        matches!(
            self,
            Note::Constant { .. } | Note::NearlyConstant { .. } | Note::Rare { .. }
        )
    }
}

/// A count with commas: 12,345.
pub fn count(n: u64) -> String {
    let digits = n.to_string();
    let mut out = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            out.push(',');
        }
        out.push(c);
    }
    out
}

/// A number in a few digits, for sentences.
pub(crate) fn short(x: f64) -> String {
    let size = if x < 0.0 { -x } else { x };
    if x == 0.0 {
        "0".into()
    } else if (1e-4..1e5).contains(&size) {
        let exponent: i32 = format!("{size:e}")
            .split_once('e')
            .map_or(0, |(_, e)| e.parse().unwrap_or(0));
        let decimals = usize::try_from(2 - exponent).unwrap_or(0);
        let text = format!("{x:.decimals$}");
        if text.contains('.') {
            text.trim_end_matches('0').trim_end_matches('.').into()
        } else {
            text
        }
    } else {
        format!("{x:.2e}")
    }
}

/// "chain 4", "chains 1 and 4"
fn chains(list: &[usize]) -> String {
    let names: Vec<String> = list.iter().map(|c| (c + 1).to_string()).collect();
    format!(
        "{} {}",
        if names.len() == 1 { "chain" } else { "chains" },
        listed(&names)
    )
}

/// "1", "1 and 4", "1, 2 and 4"
fn listed(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
}

impl fmt::Display for Note {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Note::NoDraws => write!(f, "there are no draws"),
            Note::TooManyDraws => write!(
                f,
                "more than 4,294,967,295 draws: too many for one estimate"
            ),
            Note::NotANumber { count: n, of } => write!(
                f,
                "{} of {} draws are not a number, so no figure can be made of them",
                count(*n),
                count(*of)
            ),
            Note::Infinite { count: n, of } => write!(
                f,
                "{} of {} draws are infinite, so there is no mean and no standard uncertainty",
                count(*n),
                count(*of)
            ),
            Note::Constant { value } => write!(
                f,
                "every draw is {}: draws that never differ tell nothing about an error",
                plain(*value)
            ),
            Note::AllStuck => write!(
                f,
                "no chain moved within either half of its draws, though they stand at different points: there is nothing to average"
            ),
            Note::Stuck { chains: list } => write!(
                f,
                "{} never left one point while the others moved, so no error is given",
                chains(list)
            ),
            Note::Stray {
                chains: list,
                of,
                errors,
            } if 2 * list.len() < *of => write!(
                f,
                "the mean of {} lies {} errors from that of the others, so no error is given",
                chains(list),
                short(*errors)
            ),
            Note::Stray { of, errors, .. } => write!(
                f,
                "the {of} chains fall into groups whose means lie {} errors apart, so no error is given",
                short(*errors)
            ),
            Note::Disagree { r_hat } => {
                write!(f, "chains disagree (R-hat {}): no error", three(*r_hat))
            }
            Note::NearlyConstant { value, others, of } => write!(
                f,
                "all but {} of {} draws are {}: too few others for an error",
                count(*others),
                count(*of),
                plain(*value)
            ),
            Note::Rare {
                seen,
                of,
                effective,
                limits,
            } => {
                if *seen == 0 {
                    write!(f, "never seen in {} draws", count(*of))?;
                } else if seen == of {
                    write!(f, "seen in every one of {} draws", count(*of))?;
                } else {
                    write!(
                        f,
                        "seen in {} of {} draws, too one-sided for an ordinary error",
                        count(*seen),
                        count(*of)
                    )?;
                }
                let (Some((low, high)), Some(size)) = (limits, effective) else {
                    return write!(
                        f,
                        "; nothing tells the effective size of this run, so no limit can be given"
                    );
                };
                write!(
                    f,
                    "; with an effective size of {} the probability ",
                    size_text(*size)
                )?;
                if *seen == 0 {
                    write!(f, "is below {} (97.5 % limit)", limit(*high))
                } else if seen == of {
                    write!(f, "is above {} (97.5 % limit)", limit(*low))
                } else {
                    write!(
                        f,
                        "lies between {} and {} (95 % limits)",
                        limit(*low),
                        limit(*high)
                    )
                }
            }
            Note::HeavyTail { index } if *index >= 1.0 => write!(
                f,
                "tail index {}: the mean may not exist; the median does",
                short(*index)
            ),
            Note::HeavyTail { index } => write!(
                f,
                "tail index {} is above 0.5: the mean has no error of the usual kind; the median has",
                short(*index)
            ),
            Note::Short { draws, needed } => write!(
                f,
                "{} draws a chain are too few for errors and R-hat; {needed} are needed",
                count(*draws)
            ),
            Note::OneChain => write!(
                f,
                "one chain: R-hat compares its halves, and nothing speaks for places it never visited"
            ),
            Note::FewEffective { size } => write!(
                f,
                "an effective size of {} is too small to trust the errors beside it",
                size_text(*size)
            ),
            Note::NotMixed { r_hat } => write!(
                f,
                "R-hat {}: the chains do not agree yet, and the errors may be too small",
                short(*r_hat)
            ),
            Note::Unjudged { figures } => write!(
                f,
                "the goal does not bind the {}, which {} no error",
                listed(figures),
                if figures.len() == 1 { "has" } else { "have" }
            ),
            Note::Ties { levels } => {
                let names: Vec<String> = levels
                    .iter()
                    .map(|l| format!("{} %", short(l * 100.0)))
                    .collect();
                let (what, have) = if names.len() == 1 {
                    ("quantile", "has")
                } else {
                    ("quantiles", "have")
                };
                write!(
                    f,
                    "{} {what}: among equal draws, so {have} no error of the usual kind",
                    listed(&names)
                )
            }
        }
    }
}

/// R-hat in three digits, final zeros too.
fn three(r_hat: f64) -> String {
    if r_hat > 100.0 {
        "> 100".into()
    } else {
        format!("{r_hat:.2}")
    }
}

/// An effective size: whole from 100 on.
fn size_text(size: f64) -> String {
    if size < 100.0 {
        short(size)
    } else {
        count(size as u64)
    }
}

/// A value as the shortest digits that give it back.
fn plain(x: f64) -> String {
    let size = if x < 0.0 { -x } else { x };
    if x == 0.0 || (1e-5..1e15).contains(&size) || size.is_infinite() {
        format!("{x}")
    } else {
        format!("{x:e}")
    }
}

/// A limit of a probability, with digits enough to tell it from 0 or 1.
fn limit(x: f64) -> String {
    if x > 0.99 && x < 1.0 {
        format!("1 - {}", short(1.0 - x))
    } else {
        short(x)
    }
}
