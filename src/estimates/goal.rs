//! The goal of a run against its estimates: met, or what limits it and how many draws would do.

use super::estimate::Estimate;
use super::note::{Note, count, short};
use super::summary::Figure;
use crate::maths::absolute;
use crate::plan::{EstimandGoal, Give, Goal};

/// What a review found.
#[derive(Debug, Clone, PartialEq)]
pub struct Verdict {
    pub met: bool,
    /// Everything that falls short, worst first.
    pub shortfalls: Vec<Shortfall>,
    /// Draws a chain that the goal allows.
    pub at_most: u64,
}

/// One figure that falls short of the goal.
#[derive(Debug, Clone, PartialEq)]
pub struct Shortfall {
    /// Index of the figure.
    pub figure: usize,
    pub name: String,
    /// "effective size 312 of 800"
    pub what: String,
    /// Draws a chain that would do, by the usual growth with their number; `None` where more draws promise
    /// nothing.
    pub draws: Option<u64>,
}

impl Verdict {
    /// One sentence for the reader: `rate[3] limits: effective size 312 of 800; about 5,100 draws a chain
    /// would do`. Nothing when the goal is met.
    pub fn advice(&self) -> Option<String> {
        let worst = self.shortfalls.first()?;
        let remedy = match worst.draws {
            Some(draws) => {
                let over = if draws > self.at_most {
                    format!(", more than the {} allowed", count(self.at_most))
                } else {
                    String::new()
                };
                format!("about {} draws a chain would do{over}", many(draws))
            }
            None => "more draws alone may not help".into(),
        };
        Some(format!("{} limits: {}; {remedy}", worst.name, worst.what))
    }
}

/// Reviews the figures of a point, already settled over the point ([`super::settle`]).
///
/// Every figure must reach `r_hat` and both effective sizes; where its mean is asked for, the Monte Carlo
/// error over the standard deviation must reach `error`, and the figure's own goal its own. Figures that
/// (hardly) ever took one value are judged by the effective size of the run.
pub fn review(figures: &[Figure], goal: &Goal) -> Verdict {
    let mut shortfalls = Vec::new();
    // While chains disagree nothing tells the effective size of the run: what waits for it is told last.
    let disagree = figures.iter().any(|f| f.estimate.chains_disagree());
    let waits = |f: &Figure| {
        let e = &f.estimate;
        disagree && e.effective_run.is_none() && e.notes.iter().any(Note::is_seldom)
    };
    for (index, figure) in figures.iter().enumerate() {
        for (what, factor) in lacks(figure, goal) {
            let now = figure.estimate.draws as f64;
            shortfalls.push(Shortfall {
                figure: index,
                name: figure.name.clone(),
                what,
                draws: factor.map(|f| two_digits_up(now * if f > 1.0 { f } else { 1.0 })),
            });
        }
    }
    // Without a remedy first, then by the draws wanted; a stable sort keeps the order of the figures.
    shortfalls.sort_by_key(|s| {
        let last = waits(&figures[s.figure]);
        (last, std::cmp::Reverse(s.draws.unwrap_or(u64::MAX)))
    });
    Verdict {
        met: shortfalls.is_empty(),
        at_most: goal.at_most,
        shortfalls,
    }
}

/// What a goal of digits asks of a figure and cannot judge, for want of an error: a quantile among equal draws, a
/// standard uncertainty of heavy tails.
pub fn unjudged(figure: &Figure) -> Option<Note> {
    let e = &figure.estimate;
    let digits = matches!(figure.goal, Some(EstimandGoal::Digits(_)));
    // Without any error the goal is missed, and it is said why.
    if !digits || e.mcse.is_none() || e.condition {
        return None;
    }
    let mut figures = Vec::new();
    if e.sd_mcse.is_none() && figure.give.contains(&Give::Uncertainty) {
        figures.push("standard uncertainty".to_owned());
    }
    let without = e.quantiles.iter().filter(|q| q.mcse.is_none());
    figures.extend(without.map(|q| format!("{} % quantile", short(q.level * 100.0))));
    (!figures.is_empty()).then_some(Note::Unjudged { figures })
}

/// What a figure lacks, each with the factor on its draws that would mend it.
fn lacks(figure: &Figure, goal: &Goal) -> Vec<(String, Option<f64>)> {
    let e = &figure.estimate;
    let mut out = Vec::new();
    if let Some(note) = e.notes.iter().find(|n| spoils(n)) {
        let factor = match note {
            Note::Short { draws, needed } => {
                Some(*needed as f64 / if *draws > 0 { *draws as f64 } else { 1.0 })
            }
            _ => None,
        };
        return vec![(note.to_string(), factor)];
    }
    let mean_wanted = figure.give.contains(&Give::Value);
    if let Some(seldom) = e.notes.iter().find(|n| n.is_seldom()) {
        let Some(run) = e.effective_run else {
            return vec![(seldom.to_string(), None)];
        };
        lack_of_size(&mut out, "effective size of the run", run, goal.effective);
        if let Some(error) = goal.error.filter(|_| mean_wanted) {
            let needed = 1.0 / (error * error);
            lack_of_size(&mut out, "effective size of the run", run, needed);
        }
        if let Some(own) = figure.goal.filter(|_| mean_wanted) {
            own_goal_of_rare(&mut out, e, own, run);
        }
        return out;
    }
    if let Some(r_hat) = e.r_hat.filter(|r| *r > goal.r_hat) {
        // R-hat^2 - 1 falls as one over the number of draws, once the chains mix.
        let factor =
            (goal.r_hat > 1.0).then(|| (r_hat * r_hat - 1.0) / (goal.r_hat * goal.r_hat - 1.0));
        out.push((
            format!("R-hat {} over {}", decimals(r_hat), decimals(goal.r_hat)),
            factor,
        ));
    }
    for (name, size) in [
        ("effective size", e.effective_bulk),
        ("tail effective size", e.effective_tail),
    ] {
        match size {
            Some(size) => lack_of_size(&mut out, name, size, goal.effective),
            None => out.push((format!("no {name}"), None)),
        }
    }
    if !mean_wanted {
        return out;
    }
    let (Some(mcse), Some(sd)) = (e.mcse, e.sd) else {
        // Chains that disagree lack R-hat, which is said above and has a remedy.
        if e.r_hat.is_some_and(|r| r > goal.r_hat) && e.chains_disagree() {
            return out;
        }
        let why = e
            .notes
            .iter()
            .find(|n| matches!(n, Note::HeavyTail { .. } | Note::Infinite { .. }));
        if goal.error.is_some() || figure.goal.is_some() {
            out.push((
                why.map_or("no error of the mean".into(), Note::to_string),
                None,
            ));
        }
        return out;
    };
    if let Some(error) = goal.error.filter(|error| mcse > error * sd) {
        let ratio = mcse / sd;
        let factor = (ratio / error) * (ratio / error);
        out.push((
            format!("error over sd {} of {}", short(ratio), short(error)),
            Some(factor),
        ));
    }
    if let Some(own) = figure.goal {
        own_goal(&mut out, figure, own, mcse);
    }
    out
}

/// A note after which no error can be judged.
fn spoils(note: &Note) -> bool {
    matches!(
        note,
        Note::NoDraws
            | Note::TooManyDraws
            | Note::NotANumber { .. }
            | Note::AllStuck
            | Note::Stuck { .. }
            | Note::Stray { .. }
            | Note::Short { .. }
    )
}

fn lack_of_size(out: &mut Vec<(String, Option<f64>)>, name: &str, size: f64, wanted: f64) {
    if size < wanted {
        out.push((
            format!("{name} {} of {}", whole(size), whole(wanted)),
            Some(wanted / size),
        ));
    }
}

fn own_goal(out: &mut Vec<(String, Option<f64>)>, figure: &Figure, own: EstimandGoal, mcse: f64) {
    let e = &figure.estimate;
    let mut check = |what: &str, error: f64, allowed: f64| {
        if error > allowed {
            let factor = if allowed > 0.0 {
                Some((error / allowed) * (error / allowed))
            } else {
                None
            };
            out.push((
                format!("{what} {} of {}", short(error), short(allowed)),
                factor,
            ));
        }
    };
    match own {
        EstimandGoal::Absolute(allowed) => check("error", mcse, allowed),
        EstimandGoal::Relative(part) => check("error", mcse, part * e.value.map_or(0.0, absolute)),
        EstimandGoal::Digits(digits) => {
            // Digits of the standard uncertainty; of a condition, which has none, of its probability.
            let base = if e.condition { e.value } else { e.sd };
            let tolerance = base.and_then(|u| tolerance(u, digits)).unwrap_or(0.0);
            check("twice the error", 2.0 * mcse, tolerance);
            if let Some(error) = e
                .sd_mcse
                .filter(|_| figure.give.contains(&Give::Uncertainty))
            {
                check(
                    "twice the error of the standard uncertainty",
                    2.0 * error,
                    tolerance,
                );
            }
            for q in &e.quantiles {
                if let Some(error) = q.mcse {
                    let what = format!(
                        "twice the error of the {} % quantile",
                        short(q.level * 100.0)
                    );
                    check(&what, 2.0 * error, tolerance);
                }
            }
        }
    }
}

/// A rare condition against its own goal: by its limits; parts and digits of it need to have seen it.
fn own_goal_of_rare(
    out: &mut Vec<(String, Option<f64>)>,
    e: &Estimate,
    own: EstimandGoal,
    run: f64,
) {
    let (Some((low, high)), Some(value)) = (e.limits, e.value) else {
        out.push(("no limits for a value that hardly varies".into(), None));
        return;
    };
    match own {
        EstimandGoal::Absolute(allowed) => {
            let (up, down) = (high - value, value - low);
            let error = (if up > down { up } else { down }) / 1.959_963_984_540_054;
            if error > allowed {
                out.push((
                    format!("error {} of {}", short(error), short(allowed)),
                    Some(error / allowed),
                ));
            }
        }
        EstimandGoal::Relative(_) | EstimandGoal::Digits(_) => {
            let rarer = if value < 0.5 { value } else { 1.0 - value };
            let seen = rarer * run;
            let factor = (seen > 0.0).then(|| super::rare::ENOUGH / seen);
            out.push((
                format!("seen {} effective times on its rarer side", short(seen)),
                factor,
            ));
        }
    }
}

/// Half a unit of the last of so many significant digits (JCGM 101:2008, 7.9.2): of 0.0123 to two digits,
/// 0.0005.
pub fn tolerance(uncertainty: f64, digits: u64) -> Option<f64> {
    let after = usize::try_from(digits).ok()?.checked_sub(1)?;
    if !(uncertainty.is_finite() && uncertainty != 0.0) || after > 17 {
        return None;
    }
    let text = format!("{uncertainty:.after$e}");
    let exponent: i32 = text.split_once('e')?.1.parse().ok()?;
    format!("5e{}", exponent - after as i32 - 1).parse().ok()
}

/// Rounded up to two significant digits.
fn two_digits_up(x: f64) -> u64 {
    let mut unit = 1.0;
    while x / unit > 99.0 {
        unit *= 10.0;
    }
    ((x / unit).ceil() * unit) as u64
}

/// A count; past a thousand millions by its first two digits and the power of ten.
fn many(draws: u64) -> String {
    if draws < 1_000_000_000 {
        count(draws)
    } else {
        format!("{:.1e}", draws as f64)
    }
}

fn whole(x: f64) -> String {
    count(x.round() as u64)
}

fn decimals(r_hat: f64) -> String {
    if r_hat > 100.0 {
        return "> 100".into();
    }
    let text = format!("{r_hat:.4}");
    text.trim_end_matches('0').trim_end_matches('.').into()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::estimates::QuantileEstimate;

    fn figure(e: Estimate) -> Figure {
        Figure {
            name: "rate[3]".into(),
            unit: None,
            condition: e.condition,
            give: vec![Give::Value, Give::Uncertainty],
            goal: None,
            estimate: e,
        }
    }

    fn good() -> Estimate {
        Estimate {
            chains: 4,
            draws: 2000,
            value: Some(1.0),
            mcse: Some(0.01),
            sd: Some(0.5),
            sd_mcse: Some(0.007),
            r_hat: Some(1.002),
            effective_bulk: Some(2500.0),
            effective_tail: Some(1800.0),
            effective_mean: Some(2500.0),
            ..Estimate::default()
        }
    }

    fn goal() -> Goal {
        Goal {
            error: Some(0.02),
            r_hat: 1.01,
            effective: 800.0,
            at_most: 100_000,
        }
    }

    #[test]
    fn met_when_all_is_reached() {
        let verdict = review(&[figure(good())], &goal());
        assert!(verdict.met && verdict.advice().is_none(), "{verdict:?}");
    }

    #[test]
    fn advice_names_the_worst() {
        let mut slow = good();
        slow.effective_bulk = Some(312.0);
        slow.mcse = Some(0.0101);
        let mut other = figure(slow.clone());
        other.name = "b".into();
        other.estimate.effective_bulk = Some(700.0);
        let verdict = review(&[other, figure(slow)], &goal());
        assert!(!verdict.met);
        assert_eq!(
            verdict.advice().as_deref(),
            Some("rate[3] limits: effective size 312 of 800; about 5,200 draws a chain would do")
        );
        assert_eq!(verdict.shortfalls.len(), 4);
    }

    #[test]
    fn advice_says_when_more_is_wanted_than_allowed() {
        let mut slow = good();
        slow.effective_bulk = Some(0.5);
        let far = review(&[figure(slow.clone())], &goal()).advice();
        assert_eq!(
            far.as_deref(),
            Some(
                "rate[3] limits: effective size 1 of 800; about 3,200,000 draws a chain would do, more than \
                 the 100,000 allowed"
            )
        );
        slow.effective_bulk = Some(2e-9);
        let absurd = review(&[figure(slow)], &goal()).advice().unwrap();
        assert!(
            absurd.contains("about 8.0e14 draws a chain would do, more than the 100,000 allowed"),
            "{absurd}"
        );
    }

    #[test]
    fn no_error_is_never_met() {
        let mut heavy = good();
        (heavy.mcse, heavy.sd) = (None, None);
        heavy.notes.push(Note::HeavyTail { index: 0.7 });
        let verdict = review(&[figure(heavy.clone())], &goal());
        assert!(!verdict.met);
        assert!(
            verdict
                .advice()
                .is_some_and(|a| a.contains("more draws alone may not help"))
        );
        // ... unless the mean is not asked for.
        let mut median = figure(heavy);
        median.give = vec![Give::Quantile(0.5)];
        assert!(review(&[median], &goal()).met);
        let mut stray = good();
        stray.notes.push(Note::Stray {
            chains: vec![1],
            of: 4,
            errors: 9.0,
        });
        assert!(!review(&[figure(stray)], &goal()).met);
    }

    #[test]
    fn what_never_moved_is_judged_by_the_run() {
        let mut constant = Estimate {
            chains: 4,
            draws: 2000,
            value: Some(3.0),
            ..Estimate::default()
        };
        constant.notes.push(Note::Constant { value: 3.0 });
        assert!(!review(&[figure(constant.clone())], &goal()).met);
        let mut all = [constant, good()];
        super::super::settle(&mut all);
        assert_eq!(all[0].effective_run, Some(1800.0));
        let [constant, _] = all;
        // 1 / 0.02^2 = 2500
        let verdict = review(&[figure(constant)], &goal());
        assert_eq!(
            verdict.shortfalls[0].what,
            "effective size of the run 1,800 of 2,500"
        );
    }

    #[test]
    fn own_goals() {
        let with = |own| {
            let mut f = figure(good());
            f.goal = Some(own);
            review(&[f], &goal())
        };
        assert!(with(EstimandGoal::Absolute(0.01)).met);
        assert!(!with(EstimandGoal::Absolute(0.005)).met);
        assert_eq!(
            with(EstimandGoal::Absolute(0.005)).shortfalls[0].draws,
            Some(8000)
        );
        assert!(with(EstimandGoal::Relative(0.01)).met);
        assert!(!with(EstimandGoal::Relative(0.009)).met);
        // sd 0.50: one digit tolerates 0.05, two digits 0.005; twice the error is 0.02.
        assert!(with(EstimandGoal::Digits(1)).met);
        let two = with(EstimandGoal::Digits(2));
        assert_eq!(two.shortfalls[0].what, "twice the error 0.02 of 0.005");
    }

    #[test]
    fn digits_that_cannot_be_judged_are_told() {
        let mut f = figure(good());
        f.goal = Some(EstimandGoal::Digits(1));
        let quantile = |level, mcse| QuantileEstimate {
            level,
            value: Some(15.0),
            mcse,
        };
        f.estimate.quantiles = vec![quantile(0.025, Some(0.01)), quantile(0.5, None)];
        assert!(review(&[f.clone()], &goal()).met);
        let words = unjudged(&f).unwrap().to_string();
        assert_eq!(
            words,
            "the goal does not bind the 50 % quantile, which has no error"
        );
        f.estimate.sd_mcse = None;
        let words = unjudged(&f).unwrap().to_string();
        assert!(
            words.contains("the standard uncertainty and 50 % quantile, which have no"),
            "{words}"
        );
        f.goal = Some(EstimandGoal::Absolute(1.0));
        assert_eq!(unjudged(&f), None);
    }

    #[test]
    fn tolerances_as_in_the_guide() {
        // JCGM 101:2008, 7.9.2, example 1: u = 0.00035 g to two digits gives 0.000005 g; example 2: u = 2 K
        // to one digit gives 0.5 K (from memory).
        assert_eq!(tolerance(0.00035, 2), Some(0.000005));
        assert_eq!(tolerance(2.0, 1), Some(0.5));
        assert_eq!(tolerance(0.0996, 2), Some(0.005));
        assert_eq!(tolerance(0.0, 2), None);
        assert_eq!(tolerance(1.0, 0), None);
    }
}
