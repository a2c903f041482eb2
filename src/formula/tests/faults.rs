//! What is said of formulas at fault.

use super::*;

#[test]
fn data_that_is_not_finite_is_told_with_its_row() {
    let one = |parameter: &str| {
        let text = format!("log_density(normal(mean = {parameter}, sd = b), t.y)");
        let found = faults(&text);
        assert_eq!(found.len(), 1, "{text}: {found:?}");
        found[0]
            .split(" | ")
            .take(2)
            .collect::<Vec<_>>()
            .join(" | ")
    };
    let row = "depends on data alone and is -inf for row 2 of t; so `mean` is no number there";
    assert_eq!(
        one("a + b * ln(t.x1)"),
        format!("ln(t.x1) | `ln(t.x1)` {row}")
    );
    assert_eq!(
        one("exp(a * ln(t.x1))"),
        format!("ln(t.x1) | `ln(t.x1)` {row}")
    );
    assert_eq!(
        one("ln(t.x1) - effect[t.site]"),
        format!("ln(t.x1) | `ln(t.x1)` {row}")
    );
    assert!(one("ln(t.x1)").starts_with("ln(t.x1) | `mean` of `normal` must be a finite number"));
    // Selected away, or finite in the end.
    for parameter in [
        "if(t.x1 > 0, a + b * ln(t.x1), 0)",
        "a + if(t.x1 > 0, ln(t.x1), 0)",
        "exp(a + ln(t.x1))",
        "max(a + ln(t.x1), 0)",
        "a + b * ln(t.y)",
    ] {
        value(&format!(
            "log_density(normal(mean = {parameter}, sd = b), t.y)"
        ));
    }
}

#[test]
fn slips_of_names_are_told_with_what_was_meant() {
    let help = |text: &str| {
        let found = faults(text);
        assert_eq!(found.len(), 1, "{text}: {found:?}");
        found[0].rsplit(" | ").next().unwrap().to_string()
    };
    assert_eq!(
        help("log(a)"),
        "write `ln(x)` for the natural logarithm, `log10(x)` for the one to base 10"
    );
    assert_eq!(help("a * y"), "did you mean `t.y`?");
    assert_eq!(help("dot(x, beta)"), "did you mean `t.x`?");
    assert_eq!(help("effect[north]"), "write `effect[\"north\"]`");
    assert_eq!(
        help("rate[north]"),
        "known here: `a`, `b`, `k`, `rate`, `effect`, `cross`, `beta`, `t`"
    );
    assert_eq!(
        help("a[\"north\"]"),
        "leave out the index: `a`, or declare `a` with a value per label: a = { law = \"…\", per = \"table.column\" }"
    );
    assert_eq!(
        help("a[t.site]"),
        "leave out the index: `a`, or declare `a` with a value per label: a = { law = \"…\", per = \"t.site\" }"
    );
}

#[test]
fn faults_say_where_and_what_would_be_right() {
    let mut wrong = Vec::new();
    let mut fault = |text: &str, want: &str| {
        let got = faults(text);
        if got != [want] {
            wrong.push((text.to_string(), got));
        }
    };
    fault(
        "a + rat",
        "rat | nothing is called `rat` here | did you mean `rate`?",
    );
    fault("sin(a", "a | the formula ends too early | ");
    fault(
        "a ** 2",
        "** | `**` is not a sign of formulas | write `^` for a power",
    );
    fault(
        "0 < a < 1",
        "< | comparisons do not chain | write `0 < x and x < 1`",
    );
    fault(
        "sum(a = 1)",
        "a | `sum` takes its arguments by position | it is called like `sum(x)`; to compare, write `==`",
    );
    fault(
        "sine(a)",
        "sine | no function is called `sine` | did you mean `sin(x)`, sine of an angle in radians?",
    );
    fault(
        "effect + t.y",
        "t.y | `effect` has one value per level of t.site, `t.y` one per row of t | write `effect[t.site]`",
    );
    fault(
        "t.height",
        "t.height | table `t` has no column `height` | its columns are `station`, `site`, `kind`, `y`, `x1`, `x2`, `x`",
    );
    fault("s.y", "s.y | no table is called `s` | tables here: `t`");
    fault(
        "rate[5]",
        "5 | `rate` has no element 5 | its elements have the numbers 1 to 4",
    );
    fault(
        "rate[\"Cawdl\"]",
        "\"Cawdl\" | `rate` has no element \"Cawdl\" | did you mean \"Cawdle\"?",
    );
    fault(
        "a[1]",
        "a | `a` is one value and has no elements | leave out the index: `a`",
    );
    fault(
        "(a > 1) + 1",
        "a > 1 | `a > 1` is a condition, not a number | write `if(a > 1, 1, 0)` for a number",
    );
    fault(
        "a and b > 1",
        "a | `a` is a number, not a condition | compare it with something: `a > 0`",
    );
    fault(
        "t.site == \"nort\"",
        "\"nort\" | no cell of `t.site` is \"nort\" | did you mean \"north\"?",
    );
    fault(
        "dot(t.x, rate)",
        "rate | `rate` has 4 values, but `t.x` has 2 columns | an unknown declared with `per = \"t.x\"` has one value per column",
    );
    fault(
        "log_density(normal(mean = 1, std = 2), 1)",
        "std | `normal` has no parameter `std` | did you mean `sd`? normal is written `normal(mean = …, sd = …)` or `normal(mean = …, precision = …)`",
    );
    fault(
        "log_density(normal(mean = 0, sd = -1), 1)",
        "-1 | `sd` of `normal` must be positive; it is -1 | ",
    );
    fault(
        "normal(mean = 0, sd = 1)",
        "normal | `normal` is a law, not a value | use one of its functions: `log_density(normal(…), x)` and the like",
    );
    fault("2a", "a | `a` cannot stand here | ");
    fault("", " | this formula is empty | ");
    assert!(wrong.is_empty(), "{wrong:#?}");
}

#[test]
fn several_faults_at_once() {
    let found = faults("foo + sum(bar, 1) * max(rate, effect)");
    assert_eq!(found.len(), 3, "{found:?}");
    let found = faults("max(1 +, 2 *) + sin(,)");
    assert!(found.len() >= 2, "{found:?}");
}

#[test]
fn deep_and_long_formulas_end_in_a_fault() {
    let deep = format!("{}a{}", "(".repeat(30_000), ")".repeat(30_000));
    assert_eq!(faults(&deep).len(), 1);
    let long = vec!["a"; 30_000].join("+");
    assert_eq!(faults(&long).len(), 1);
    let minus = "-".repeat(60_000) + "a";
    assert_eq!(faults(&minus).len(), 1);
    let huge = "1".repeat(100_000);
    assert_eq!(faults(&huge).len(), 1);
    let index = format!("rate{}", "[1]".repeat(20_000));
    assert_eq!(faults(&index).len(), 1);
    let calls = format!("{}a{}", "sin(".repeat(15_000), ")".repeat(15_000));
    assert_eq!(faults(&calls).len(), 1);
}
