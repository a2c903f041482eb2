//! Forged decisions: a run that ended elsewhere than its plan says, or learnt where it should not.

use crate::forged::refused;
use crate::forger::Forger;
use crate::honest;
use odograph::course::Phase;

#[test]
fn a_run_that_stopped_when_its_figures_were_lucky() {
    // The first review did not meet the goal; the record of it is whole in every other way.
    let cut = |forger: &mut Forger| {
        let burn_in = forger.burn_in();
        for chain in &mut forger.chains {
            let mut draws = 0;
            let first = chain[burn_in..].iter().take_while(|made| {
                draws += made.draws.draws;
                draws <= 800
            });
            let length = burn_in + first.count();
            chain.truncate(length);
        }
    };
    let alter = |forger: &mut Forger| {
        cut(forger);
        forger.seal();
    };
    refused(
        alter,
        'd',
        &["it ends after 800 draws, where the plan does not end it"],
    );
    // With a verdict to match.
    let alter = |forger: &mut Forger| {
        cut(forger);
        forger.seal_with(|outcome| outcome.points[0].0.goal = odograph::estimates::GoalState::Met);
    };
    refused(
        alter,
        'd',
        &["it ends after 800 draws, where the plan does not end it"],
    );
}

#[test]
fn a_run_that_went_on_past_its_goal() {
    let alter = |forger: &mut Forger| {
        // The next review is half as far again, in whole blocks.
        let task = odograph::engine::Task::of(&forger.plan, 0);
        let burn_in = forger.burn_in();
        let done: usize = forger.chains[0][burn_in..]
            .iter()
            .map(|made| made.draws.draws)
            .sum();
        let next = *task
            .reviews
            .iter()
            .find(|review| **review > done as u64)
            .expect("a review");
        let burnt: usize = forger.chains[0][..burn_in]
            .iter()
            .map(|made| made.draws.draws)
            .sum();
        let cut = odograph::engine::blocks(&task, burnt as u64, next).expect("blocks");
        for chain in 0..forger.chains.len() {
            let from = forger.chains[chain].len();
            for (phase, draws) in &cut[from..] {
                let mut made = forger.chains[chain][from - 1].clone();
                made.phase = *phase;
                made.draws.draws = *draws as usize;
                forger.chains[chain].push(made);
            }
            forger.on_from(chain, from as u64, cut.len() as u64);
        }
        forger.seal();
    };
    refused(
        alter,
        'd',
        &["by the plan it ends after", "where the goal is met"],
    );
}

#[test]
fn a_burn_in_of_another_length() {
    // Half of it left out: every draw then follows from a state that no plan gives.
    let alter = |forger: &mut Forger| {
        let half = forger.burn_in() / 2;
        for chain in &mut forger.chains {
            chain.drain(..half);
        }
        forger.seal();
    };
    refused(alter, 'd', &["the burn-in ends after"]);
}

#[test]
fn adaptation_that_went_on() {
    let first = honest().forger.burn_in();
    let end = honest().forger.chains[0].len();
    // Kernels that learn to the end, as they would in burn-in.
    let learning = |forger: &Forger| {
        let mut course = forger.course(0);
        course
            .load(0, &forger.chains[0][first - 1].state)
            .expect("a sound state");
        let mut made = forger.chains[0].clone();
        for made in &mut made[first..] {
            made.draws = course.advance(Phase::BurnIn, made.draws.draws).remove(0);
            made.state = course.save(0);
        }
        made
    };
    let alter = |forger: &mut Forger| {
        forger.chains[0] = learning(forger);
        forger.seal();
    };
    refused(
        alter,
        'c',
        &[&format!(
            "chain 1, block {} adapted after the burn-in",
            first + 1
        )],
    );
    // Hidden: the trail says that nothing was learnt, and no state in between is kept.
    let alter = |forger: &mut Forger| {
        let mut made = learning(forger);
        let frozen = made[first - 1].state.frozen.clone();
        for made in &mut made[first..] {
            made.state.frozen = frozen.clone();
        }
        forger.chains[0] = made;
        forger.kept = Some(vec![first as u64, end as u64]);
        forger.seal();
    };
    refused(
        alter,
        'f',
        &[&format!("chain 1, block {} ", first + 1), "the plan gives"],
    );
    // Slyer: another frozen state from the end of the burn-in on, constant as it should be, with all that follows
    // from it.
    let alter = |forger: &mut Forger| {
        let learnt = forger.chains[2][first - 1].state.frozen.clone();
        forger.chains[0][first - 1].state.frozen = learnt;
        forger.on_from(0, first as u64, end as u64);
        forger.seal();
    };
    let words = "leaves another frozen state (what the kernels learnt) than the plan gives";
    refused(alter, 'f', &[&format!("chain 1, block {first} {words}")]);
}
