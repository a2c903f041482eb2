//! Quadrature of densities by Gauss and Legendre's rule on short pieces.

/// Nodes and weights of the rule of 10 points (Abramowitz & Stegun 1964, table 25.4), one side.
const RULE: [(f64, f64); 5] = [
    (0.148_874_338_981_631_21, 0.295_524_224_714_752_87),
    (0.433_395_394_129_247_2, 0.269_266_719_309_996_36),
    (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
    (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
    (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
];

/// The integral over [a, b], halved until two rules agree to a share of 1e-11 of `whole`.
pub fn integral(density: &dyn Fn(f64) -> f64, a: f64, b: f64, whole: f64) -> f64 {
    let rule = |a: f64, b: f64| {
        let (middle, half) = (0.5 * (a + b), 0.5 * (b - a));
        half * RULE
            .iter()
            .map(|(node, weight)| {
                weight * (density(middle - half * node) + density(middle + half * node))
            })
            .sum::<f64>()
    };
    fn halve(
        rule: &dyn Fn(f64, f64) -> f64,
        a: f64,
        b: f64,
        once: f64,
        whole: f64,
        depth: u32,
    ) -> f64 {
        let middle = 0.5 * (a + b);
        let (left, right) = (rule(a, middle), rule(middle, b));
        if depth == 0 || (left + right - once).abs() <= 1e-11 * whole {
            return left + right;
        }
        halve(rule, a, middle, left, whole, depth - 1)
            + halve(rule, middle, b, right, whole, depth - 1)
    }
    halve(&rule, a, b, rule(a, b), whole, 12)
}
