//! Mean, its error, R-hat and effective sizes by plain loops: draws ranked by a sort, normal scores, lags taken
//! directly until the first pair of them sums to nought or less (Vehtari et al. 2021; Geyer 1992).

#![expect(
    clippy::disallowed_methods,
    reason = "the plain loop uses std's functions: that is what it is compared for"
)]

/// What is reported of one quantity.
#[derive(Debug, Clone, Copy)]
pub struct Figures {
    pub mean: f64,
    pub error: f64,
    pub r_hat: f64,
    pub bulk: f64,
    pub tail: f64,
}

/// All chains one after another, of equal length.
pub fn figures(draws: &[f64], chains: usize) -> Figures {
    let length = draws.len() / chains / 2;
    let mut order: Vec<u32> = (0..draws.len() as u32).collect();
    order.sort_by(|a, b| draws[*a as usize].total_cmp(&draws[*b as usize]));
    let at = |level: f64| draws[order[(level * (draws.len() - 1) as f64) as usize] as usize];
    let median = at(0.5);
    let scores = normal_scores(draws, &order);
    let folded: Vec<f64> = draws.iter().map(|x| (x - median).abs()).collect();
    let mut folded_order: Vec<u32> = (0..draws.len() as u32).collect();
    folded_order.sort_by(|a, b| folded[*a as usize].total_cmp(&folded[*b as usize]));
    let folded_scores = normal_scores(&folded, &folded_order);
    let below = |q: f64| -> Vec<f64> { draws.iter().map(|x| f64::from(*x <= q)).collect() };

    let plain = Lags::new(draws, length);
    let bulk = Lags::new(&scores, length);
    let wide = Lags::new(&folded_scores, length);
    let low = Lags::new(&below(at(0.05)), length).effective();
    let high = Lags::new(&below(at(0.95)), length).effective();
    Figures {
        mean: plain.mean,
        error: plain.total.sqrt() / plain.effective().sqrt(),
        r_hat: bulk.r_hat().max(wide.r_hat()),
        bulk: bulk.effective(),
        tail: low.min(high),
    }
}

/// Normal quantile of (rank - 3/8) / (n + 1/4), ties sharing their mean rank.
fn normal_scores(values: &[f64], order: &[u32]) -> Vec<f64> {
    let mut scores = vec![0.0; values.len()];
    let mut i = 0;
    while i < order.len() {
        let mut j = i + 1;
        while j < order.len() && values[order[j] as usize] == values[order[i] as usize] {
            j += 1;
        }
        let rank = (i + j + 1) as f64 / 2.0;
        let score = normal_quantile((rank - 0.375) / (values.len() as f64 + 0.25));
        for place in &order[i..j] {
            scores[*place as usize] = score;
        }
        i = j;
    }
    scores
}

/// Rational approximation with an error of 4.5e-4 (Hastings 1955; Abramowitz & Stegun 26.2.23): the plain
/// loop is allowed a cheap one.
fn normal_quantile(p: f64) -> f64 {
    let t = (-2.0 * p.min(1.0 - p).ln()).sqrt();
    let x = t
        - (2.515_517 + t * (0.802_853 + t * 0.010_328))
            / (1.0 + t * (1.432_788 + t * (0.189_269 + t * 0.001_308)));
    if p < 0.5 { -x } else { x }
}

/// Half chains with their means, ready for autocovariances lag by lag.
struct Lags<'a> {
    parts: Vec<&'a [f64]>,
    means: Vec<f64>,
    mean: f64,
    within: f64,
    total: f64,
}

impl<'a> Lags<'a> {
    fn new(all: &'a [f64], length: usize) -> Lags<'a> {
        let parts: Vec<&[f64]> = all.chunks_exact(length).collect();
        let (m, n) = (parts.len() as f64, length as f64);
        let means: Vec<f64> = parts.iter().map(|p| p.iter().sum::<f64>() / n).collect();
        let mean = means.iter().sum::<f64>() / m;
        let between = means.iter().map(|c| (c - mean) * (c - mean)).sum::<f64>() / (m - 1.0);
        let mut lags = Lags {
            parts,
            means,
            mean,
            within: 0.0,
            total: 0.0,
        };
        lags.within = lags.covariance(0) * n / (n - 1.0);
        lags.total = lags.within * (n - 1.0) / n + between;
        lags
    }

    fn covariance(&self, lag: usize) -> f64 {
        let mut sum = 0.0;
        for (part, centre) in self.parts.iter().zip(&self.means) {
            for (a, b) in part.iter().zip(&part[lag..]) {
                sum += (a - centre) * (b - centre);
            }
        }
        sum / (self.parts.len() * self.parts[0].len()) as f64
    }

    fn r_hat(&self) -> f64 {
        (self.total / self.within).sqrt()
    }

    fn effective(&self) -> f64 {
        let rho = |lag: usize| 1.0 - (self.within - self.covariance(lag)) / self.total;
        let length = self.parts[0].len();
        let (mut tau, mut lowest, mut lag) = (-1.0, f64::INFINITY, 0);
        while lag + 1 < length {
            let pair = if lag == 0 { 1.0 } else { rho(lag) } + rho(lag + 1);
            if pair <= 0.0 {
                break;
            }
            lowest = lowest.min(pair);
            tau += 2.0 * lowest;
            lag += 2;
        }
        (self.parts.len() * length) as f64 / tau
    }
}
