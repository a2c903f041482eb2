//! `report.html`: the figures and their grounds as tables on one page, without any script, time or host.

use super::outcome::Outcome;
use super::{FOOT, figures_text};
use crate::canon;

/// The page of an outcome.
pub fn report_html(outcome: &Outcome<'_>) -> String {
    let mut page = String::from("<!DOCTYPE html>\n");
    page.push_str(&outcome.plan.title);
    for (summary, _) in &outcome.points {
        page.push_str(&figures_text(summary, super::WIDTH));
    }
    page.push_str(&canon::hex(&outcome.digest()));
    page.push_str(FOOT);
    page
}
