//! Snapshots of what a reader sees.

use super::samples::{paired_sweep, standings, summary, sweep};
use super::sweep::differences_text;
use super::*;

#[test]
fn one_point() {
    let s = summary();
    let g = standings(&s);
    let got = run_text(
        &["Failure rates", "Which station fails most often?"],
        &[(s, g)],
        WIDTH,
    );
    assert!(
        got.lines()
            .all(|l| unicode_width::UnicodeWidthStr::width(l) <= WIDTH),
        "{got}"
    );
    assert_eq!(got, [ONE_POINT, GROUNDS].concat());
}

#[test]
fn many_points() {
    let points: Vec<_> = sweep()
        .into_iter()
        .map(|s| (s.clone(), standings(&s)))
        .collect();
    let got = run_text(&["Failure rates", ""], &points, WIDTH);
    assert!(
        got.lines()
            .all(|l| unicode_width::UnicodeWidthStr::width(l) <= WIDTH),
        "{got}"
    );
    assert_eq!(got, [MANY_POINTS, GROUNDS].concat());
}

#[test]
fn a_sweep_shows_the_grounds_of_its_worst_point() {
    let mut points: Vec<_> = sweep()
        .into_iter()
        .map(|s| (s.clone(), standings(&s)))
        .collect();
    points[1].1.claims[1].conditions[0].standing = crate::course::Standing::Failed;
    points[1].1.claims[1].standing = crate::course::Standing::Failed;
    points[2].1.claims[1].standing = crate::course::Standing::Proved;
    let got = run_text(&["Failure rates", ""], &points, WIDTH);
    let flat = got.split_whitespace().collect::<Vec<_>>().join(" ");
    let heading = "Grounds (of the worst point, model.constant.prior_rate = 1.5, sampler.method = slice; at 2 others";
    assert!(flat.contains(heading), "{got}");
    assert!(flat.contains("The error bar holds: failed"), "{got}");
    let listed = "Conditions that have failed model.constant.prior_rate = 1.5, sampler.method = slice: finite mass (accepted) These";
    assert!(flat.contains(listed), "{got}");
}

#[test]
fn points_that_share_streams_show_their_differences() {
    let points = paired_sweep();
    let text = differences_text(&points, 60, WIDTH);
    assert_eq!(text, DIFFERENCES);
    assert_eq!(differences_text(&sweep(), 60, WIDTH), "");
    let numerics = crate::plan::NUMERICS;
    let json = summary_json(numerics, "abc", None, &points).canonical();
    let read: serde_json::Value = serde_json::from_str(&json).expect("JSON");
    assert!(read["points"][0]["differences"].is_null());
    let differences = &read["points"][1]["differences"];
    assert_eq!(differences["from"], "5f2c0");
    let first = &differences["estimands"][0];
    assert_eq!(
        (&first["name"], &first["value"]),
        (&"rate[\"Cawdle\"]".into(), &0.01.into())
    );
    let reason = read["points"][2]["differences"]["reason"].as_str();
    assert!(reason.is_some_and(|r| r.contains("3,000 draws a chain")));
    let csv = summary_csv(&points);
    let mut lines = csv.lines();
    let header = lines.next().unwrap();
    assert!(header.ends_with("notes,difference,difference_mcse,difference_notes"));
    assert!(lines.next().unwrap().ends_with(",,,,"), "{csv}");
    assert!(lines.nth(3).unwrap().ends_with(",,0.01,0.000011,"), "{csv}");
}

/// That the error bar is not known to hold is usual, and said to be, unless something speaks against it.
#[test]
fn what_is_usual_is_said_to_be() {
    let mut s = summary();
    let heavy = grounds_text(&standings(&s), WIDTH);
    assert!(!heavy.contains("This is usual"), "{heavy}");
    s.figures[2].estimate.tail_index = Some(0.3);
    let light = grounds_text(&standings(&s), WIDTH);
    let flat = light.split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(
        flat.contains("The error bar holds: not known This is usual, and no sign"),
        "{light}"
    );
    s.figures[0].estimate.r_hat = Some(1.09);
    let unmixed = grounds_text(&standings(&s), WIDTH);
    assert!(!unmixed.contains("This is usual"), "{unmixed}");
}

/// Quantiles of a quantity that takes whole values are whole numbers.
#[test]
fn whole_numbers_have_no_decimals() {
    let mut s = summary();
    let (figure, mut ends) = (&mut s.figures[0], [1958.0, 1962.0].into_iter());
    for q in figure
        .estimate
        .quantiles
        .iter_mut()
        .filter(|q| q.level != 0.5)
    {
        q.value = ends.next();
    }
    let text = figures_text(&s, WIDTH);
    assert!(text.contains(" 1958 to 1962 "), "{text}");
}

#[test]
fn files() {
    let s = [summary()];
    let numerics = crate::plan::Numerics {
        draws: 1,
        estimates: 1,
    };
    assert_eq!(
        summary_json(numerics, "abc", None, &s).canonical(),
        SUMMARY_JSON
    );
    assert_eq!(summary_csv(&s), SUMMARY_CSV);
    let text = grounds_json(&[("5f2c".into(), standings(&s[0]))]).canonical();
    let read: serde_json::Value = serde_json::from_str(&text).expect("JSON");
    let claim = &read["points"][0]["grounds"]["claims"][1];
    assert_eq!(claim["claim"], "the error bar holds");
    assert_eq!(claim["conditions"][0]["accepted"], true);
    assert_eq!(
        claim["and_one_of"][0][0]["condition"],
        "geometrically ergodic"
    );
}

const DIFFERENCES: &str = r#"
difference from the first point (Monte Carlo error of the difference)
                                                rate["Fen End, the pump
                                                house by the old sluice
                                                    on the eastern main
                                rate["Cawdle"]                  drain"]
prior_rate  method      goal              1/kh                     1/kh        b  worst_is_third
1.5         slice       met       0.010000(11)                     0(?)  -3.2(4)               –
2.5         metropolis  missed               –                        –        –               –
(?) no error, – no difference; the reasons stand in summary.csv
The points share their random numbers. These errors are those of chains taken in pairs, in which the
noise that both have in common cancels, and are not to be had from the errors above.
"#;
/// Beneath both.
const GROUNDS: &str = r#"The average converges: assumed
  finite mass             assumed           accepted by the study; b has an improper flat law: the
                                            mass is finite only if the data bound it
  invariant               by construction   random walk with Metropolis acceptance leaves the
                                            target's law as it is; what is adapted in burn-in is
                                            frozen before the first draw
  irreducible             not contradicted  8 chains, largest R-hat 1.002 (rate["Cawdle"]); a region
                                            that no chain visited would not show
  recurrent               not contradicted  the chains came together from their starts; starts that
                                            none of them had are not seen
  integrable              not contradicted  largest tail index 0.62 (b), under 1; a tail that begins
                                            beyond the draws would not show
The error bar holds: not known
  rests on finite mass, invariant, irreducible, recurrent, integrable (above)
  start forgotten         not contradicted  largest R-hat 1.002 (rate["Cawdle"]); what the chains
                                            have in common, a wrong region too, would not show
  and either
    geometrically ergodic not known         nothing is known about it
    moment above two      not known         tail index 0.62 (b), from 0.5 on, speaks against the
                                            variance
  or
    reversible            not known         nothing is known about it
    second moment         not known         tail index 0.62 (b), from 0.5 on, speaks against the
                                            variance
The n-step law converges: assumed
  rests on finite mass, invariant, irreducible, recurrent (above)
  aperiodic               by construction   some proposals are refused
Accepted by the study in spite of their standing: finite mass; because: the counts bound b

These figures describe the model as stated. Where one of them bears on safety, local codes and
licensed practice decide.
"#;
const ONE_POINT: &str = r#"Failure rates
Which station fails most often?

8 chains of 2,000 draws each, after a burn-in of 1,000; the goal is MISSED: b limits: no error of
the mean; more draws alone may not help.

                             value  standard                         effective
                      (Monte Carlo    uncer-            95 %             size:
quantity        unit        error)    tainty        interval  R-hat       bulk   tail  notes
rate["Cawdle"]  1/kh   0.05983(27)    0.0251  0.022 to 0.120  1.002      9,312  8,120
rate["Fen End, the pump house by the old sluice on the eastern main drain"]
                1/kh      1.104(8)     0.310    0.64 to 1.85  1.002      9,312  8,120
b                           812(?)         –     210 to 1770  1.002      9,312  8,120  1
worst_is_third                0(?)                                –          –      –  2

quantile (Monte Carlo error)  unit      2.5 %     median      97.5 %
rate["Cawdle"]                1/kh  0.0222(8)  0.0573(4)  0.1201(11)
rate["Fen End, the pump house by the old sluice on the eastern main drain"]
                              1/kh  0.639(22)  1.073(10)     1.85(3)
b                                     210(40)    772(15)    1770(50)

Notes
1  tail index 0.62 is above 0.5: the mean has no error of the usual kind; the median has
2  never seen in 16,000 draws; with an effective size of 8,120 the probability is below 0.000454
   (97.5 % limit)

Grounds
"#;
const MANY_POINTS: &str = r#"Failure rates

value (Monte Carlo error) at each point
                                                rate["Fen End, the pump
                                                house by the old sluice
                                                    on the eastern main
                                rate["Cawdle"]                  drain"]
prior_rate  method      goal              1/kh                     1/kh       b  worst_is_third
0.5         metropolis  met        0.05983(27)                 1.104(8)  812(?)            0(?)
1.5         slice       met        0.06983(27)                 1.104(8)  812(?)            0(?)
2.5         metropolis  missed     0.07983(27)                 1.104(8)  812(?)            0(?)
(?) no error; the reasons stand in summary.csv

Grounds (of the first point; the claims stand alike at all points)
"#;
const SUMMARY_JSON: &str = r#"{"numerics":{"draws":1,"estimates":1},"plan_digest":"abc","points":[{"burn_in":1000,"draws_per_chain":2000,"estimands":[{"effective_bulk":9312.4,"effective_tail":8120.7,"mcse":0.000262,"name":"rate[\"Cawdle\"]","notes":[],"quantiles":{"0.025":{"mcse":0.000786,"value":0.02218},"0.5":{"mcse":0.00034060000000000004,"value":0.05732},"0.975":{"mcse":0.001048,"value":0.12007000000000001}},"r_hat":1.0018,"sd":0.0251,"unit":"1/kh","value":0.05983},{"effective_bulk":9312.4,"effective_tail":8120.7,"mcse":0.00731,"name":"rate[\"Fen End, the pump house by the old sluice on the eastern main drain\"]","notes":[],"quantiles":{"0.025":{"mcse":0.021929999999999998,"value":0.6390000000000001},"0.5":{"mcse":0.009503,"value":1.0730000000000002},"0.975":{"mcse":0.02924,"value":1.848}},"r_hat":1.0018,"sd":0.31,"unit":"1/kh","value":1.104},{"effective_bulk":9312.4,"effective_tail":8120.7,"mcse":null,"name":"b","notes":["tail index 0.62 is above 0.5: the mean has no error of the usual kind; the median has"],"quantiles":{"0.025":{"mcse":33,"value":212.29999999999995},"0.5":{"mcse":14.3,"value":772.3},"0.975":{"mcse":44,"value":1772.3}},"r_hat":1.0018,"sd":null,"unit":null,"value":812.3},{"effective_bulk":null,"effective_tail":null,"mcse":null,"name":"worst_is_third","notes":["never seen in 16,000 draws; with an effective size of 8,120 the probability is below 0.000454 (97.5 % limit)"],"quantiles":{},"r_hat":null,"sd":null,"unit":null,"value":0}],"goal":"missed","key":"5f2c","values":{}}],"result_digest":null,"schema":1}"#;
const SUMMARY_CSV: &str = "\
point,draws_per_chain,burn_in,goal,name,unit,value,mcse,sd,r_hat,effective_bulk,effective_tail,q0.025,q0.025_mcse,q0.5,q0.5_mcse,q0.975,q0.975_mcse,notes\r\n\
5f2c,2000,1000,missed,\"rate[\"\"Cawdle\"\"]\",1/kh,0.05983,0.000262,0.0251,1.0018,9312.4,8120.7,0.02218,0.000786,0.05732,0.00034060000000000004,0.12007000000000001,0.001048,\r\n\
5f2c,2000,1000,missed,\"rate[\"\"Fen End, the pump house by the old sluice on the eastern main drain\"\"]\",1/kh,1.104,0.00731,0.31,1.0018,9312.4,8120.7,0.6390000000000001,0.021929999999999998,1.0730000000000002,0.009503,1.848,0.02924,\r\n\
5f2c,2000,1000,missed,b,,812.3,,,1.0018,9312.4,8120.7,212.29999999999995,33,772.3,14.3,1772.3,44,tail index 0.62 is above 0.5: the mean has no error of the usual kind; the median has\r\n\
5f2c,2000,1000,missed,worst_is_third,,0,,,,,,,,,,,,\"never seen in 16,000 draws; with an effective size of 8,120 the probability is below 0.000454 (97.5 % limit)\"\r\n\
";
