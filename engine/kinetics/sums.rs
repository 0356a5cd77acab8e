//! Owns sums of signed terms gathered from an array: each output is the sum of some terms with
//! small integer weights, plain or with the rounding errors of the additions carried along.
//!
//! It never knows what the terms are: right-hand side and Jacobian both use it.

/// One output and the end of its terms in [`SignedSums::terms`]; they begin where those of the
/// row before end.
#[derive(Debug, Clone, Copy)]
struct Row {
    output: u32,
    /// One past the last term of weight +1; those of weight -1 follow.
    gains_end: u32,
    end: u32,
}

/// A term with a weight other than +1 or -1.
#[derive(Debug, Clone, Copy)]
struct Weighted {
    row: u32,
    term: u32,
    weight: f64,
}

/// Output i = sum of weight * term over the entries given for row i.
#[derive(Debug, Clone)]
pub struct SignedSums {
    rows: Vec<Row>,
    terms: Vec<u32>,
    /// In the order of the rows.
    weighted: Vec<Weighted>,
}

impl SignedSums {
    /// Sums with `rows` outputs from entries (row, term, weight); the order of the entries is kept
    /// within a row and a sign, so that the same entries always give the same bits.
    pub fn new(rows: usize, entries: &[(usize, usize, i32)]) -> SignedSums {
        let mut plus = vec![Vec::new(); rows];
        let mut minus = vec![Vec::new(); rows];
        let mut weighted = Vec::new();
        for &(row, term, weight) in entries {
            match weight {
                1 => plus[row].push(term as u32),
                -1 => minus[row].push(term as u32),
                _ => weighted.push(Weighted {
                    row: row as u32,
                    term: term as u32,
                    weight: f64::from(weight),
                }),
            }
        }
        // Rows of equal shape stand together: the processor then predicts the ends of the loops,
        // which matters where most rows have one or two terms (a Jacobian of 12,000: 79 to 36 us).
        let mut shapes: Vec<usize> = (0..rows).collect();
        shapes.sort_by_key(|&row| (plus[row].len(), minus[row].len()));
        let mut turn = vec![0; rows];
        (0..).zip(&shapes).for_each(|(at, &row)| turn[row] = at);
        weighted.sort_by_key(|term: &Weighted| turn[term.row as usize]);
        let mut terms = Vec::with_capacity(entries.len());
        let rows = shapes
            .into_iter()
            .map(|row| {
                terms.extend_from_slice(&plus[row]);
                let gains_end = terms.len() as u32;
                terms.extend_from_slice(&minus[row]);
                Row {
                    output: row as u32,
                    gains_end,
                    end: terms.len() as u32,
                }
            })
            .collect();
        SignedSums {
            rows,
            terms,
            weighted,
        }
    }

    /// Writes every output, by plain addition: errors are of the size of the round-off of the
    /// largest term.
    pub fn evaluate(&self, source: &[f64], out: &mut [f64]) {
        let mut start = 0usize;
        for row in &self.rows {
            let (middle, end) = (row.gains_end as usize, row.end as usize);
            let gain = gather(source, &self.terms[start..middle]);
            let loss = gather(source, &self.terms[middle..end]);
            out[row.output as usize] = gain - loss;
            start = end;
        }
        for term in &self.weighted {
            out[term.row as usize] += term.weight * source[term.term as usize];
        }
    }

    /// Writes every output as if added in twice the precision and then rounded: errors are of the
    /// size of the round-off of the output itself, however large the terms that cancel in it.
    pub fn evaluate_exactly(&self, source: &[f64], out: &mut [f64]) {
        let mut start = 0usize;
        let mut weighted = self.weighted.iter().peekable();
        for row in &self.rows {
            let (middle, end) = (row.gains_end as usize, row.end as usize);
            let mut sum = exact(source, &self.terms[start..middle]);
            sum.subtract(exact(source, &self.terms[middle..end]));
            while let Some(term) = weighted.next_if(|term| term.row == row.output) {
                // Weights are small integers, but 3 x is not exact: its error is added too.
                let (weight, value) = (term.weight, source[term.term as usize]);
                sum.add(weight * value);
                sum.lost += weight.mul_add(value, -(weight * value));
            }
            out[row.output as usize] = sum.value();
            start = end;
        }
    }
}

/// The sum of the named terms. Four running sums hide the latency of the additions.
#[inline]
fn gather(source: &[f64], terms: &[u32]) -> f64 {
    let (fours, rest) = terms.as_chunks::<4>();
    let rest = rest
        .iter()
        .fold(0.0, |sum, &term| sum + source[term as usize]);
    if fours.is_empty() {
        return rest;
    }
    let mut sums = [0.0f64; 4];
    for four in fours {
        for (sum, &term) in sums.iter_mut().zip(four) {
            *sum += source[term as usize];
        }
    }
    ((sums[0] + sums[1]) + (sums[2] + sums[3])) + rest
}

/// A sum and what rounding has taken from it (Knuth's two-sum; Ogita, Rump & Oishi 2005, SIAM J.
/// Sci. Comput. 26, 1955: the result is as if computed in twice the precision).
#[derive(Debug, Clone, Copy, Default)]
struct Exact {
    sum: f64,
    lost: f64,
}

impl Exact {
    #[inline]
    fn add(&mut self, term: f64) {
        let sum = self.sum + term;
        let added = sum - self.sum;
        self.lost += (self.sum - (sum - added)) + (term - added);
        self.sum = sum;
    }

    #[inline]
    fn join(&mut self, other: Exact) {
        self.add(other.sum);
        self.lost += other.lost;
    }

    #[inline]
    fn subtract(&mut self, other: Exact) {
        self.add(-other.sum);
        self.lost -= other.lost;
    }

    #[inline]
    fn value(self) -> f64 {
        self.sum + self.lost
    }
}

/// [`gather`] with the rounding errors carried along.
#[inline]
fn exact(source: &[f64], terms: &[u32]) -> Exact {
    let (fours, rest) = terms.as_chunks::<4>();
    let mut total = Exact::default();
    rest.iter()
        .for_each(|&term| total.add(source[term as usize]));
    if fours.is_empty() {
        return total;
    }
    let mut sums = [Exact::default(); 4];
    for four in fours {
        for (sum, &term) in sums.iter_mut().zip(four) {
            sum.add(source[term as usize]);
        }
    }
    sums.into_iter().for_each(|sum| total.join(sum));
    total
}

#[cfg(test)]
mod tests {
    use super::SignedSums;

    #[test]
    fn every_weight_and_an_empty_row() {
        // Wrong bounds of a row would mix the terms of neighbours; a lost weight breaks 2A -> B.
        let source = [1.0, 10.0, 100.0, 1000.0, 1e4, 1e5];
        let mut entries = vec![(0, 0, 1), (0, 1, -1), (0, 2, 2), (2, 3, -3), (2, 0, 1)];
        entries.extend((0..6).map(|term| (3, term, -1)));
        entries.extend((0..5).map(|term| (3, term, 1)));
        let sums = SignedSums::new(4, &entries);
        let mut out = [f64::NAN; 4];
        sums.evaluate(&source, &mut out);
        assert_eq!(out, [191.0, 0.0, -2999.0, -1e5]);
        out.fill(f64::NAN);
        sums.evaluate_exactly(&source, &mut out);
        assert_eq!(out, [191.0, 0.0, -2999.0, -1e5]);
    }

    /// Three rows that exchange fluxes in two cycles, as charge states of dust do by way of many
    /// ions: round-off of the gross fluxes in any row, or of the weight 3, would break their sum.
    #[test]
    fn rows_add_up_to_the_round_off_of_the_net() {
        let mut random = fastrand::Rng::with_seed(8);
        let mut source: Vec<f64> = (0..40).map(|_| 1e6 * random.f64()).collect();
        let mut entries = Vec::new();
        for term in 0..40 {
            let weight = if term % 7 == 0 { 3 } else { 1 };
            let (from, to) = [(0, 1), (1, 0), (1, 2), (2, 1)][term % 4];
            entries.extend([(from, term, -weight), (to, term, weight)]);
        }
        // Balance both exchanges, so that the net changes are round-off of single fluxes.
        for (there, back) in [(0, 1), (2, 3)] {
            let flux = |way| -> f64 {
                let terms = entries
                    .iter()
                    .filter(|(_, term, w)| term % 4 == way && *w > 0);
                terms.map(|&(_, term, w)| f64::from(w) * source[term]).sum()
            };
            let excess = flux(there) - flux(back);
            source[4 * 2 + if excess > 0.0 { back } else { there }] += excess.abs();
        }
        let sums = SignedSums::new(3, &entries);
        let (mut plain, mut exact) = ([0.0; 3], [0.0; 3]);
        sums.evaluate(&source, &mut plain);
        sums.evaluate_exactly(&source, &mut exact);
        assert!(exact.iter().any(|&net| net != 0.0), "{exact:?}");
        let total = |rows: &[f64; 3]| (rows[0] + rows[1] + rows[2]).abs();
        assert!(total(&exact) < 1e-24, "{exact:?}");
        assert!(total(&plain) > 1e-12, "{plain:?}: no longer needed?");
    }
}
