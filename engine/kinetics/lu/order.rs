//! Owns the order of elimination: a Markowitz rule restricted to the diagonal, and the fill it
//! leaves, both from the pattern alone.
//!
//! It never sees a value: the order is worked out once per network and serves every cell.

/// A set of small numbers, one bit each.
#[derive(Debug, Clone)]
pub(super) struct Bits(Vec<u64>);

impl Bits {
    fn new(count: usize) -> Bits {
        Bits(vec![0; count.div_ceil(64)])
    }

    fn insert(&mut self, member: usize) {
        self.0[member / 64] |= 1 << (member % 64);
    }

    fn remove(&mut self, member: usize) {
        self.0[member / 64] &= !(1 << (member % 64));
    }

    fn add(&mut self, other: &Bits) {
        self.0.iter_mut().zip(&other.0).for_each(|(a, b)| *a |= b);
    }

    fn count(&self) -> usize {
        self.0.iter().map(|word| word.count_ones() as usize).sum()
    }

    /// The members, ascending.
    fn members(&self) -> Vec<usize> {
        (0..64 * self.0.len())
            .filter(|&member| self.0[member / 64] >> (member % 64) & 1 == 1)
            .collect()
    }
}

/// The order and the pattern of the factors.
#[derive(Debug, Clone)]
pub(super) struct Elimination {
    /// The row (and column) eliminated at each place.
    pub order: Vec<usize>,
    /// For each place the columns of its row of U right of the diagonal, by place, ascending.
    pub upper: Vec<Vec<usize>>,
    /// For each place the columns of its row of L left of the diagonal, by place, ascending.
    pub lower: Vec<Vec<usize>>,
}

/// Eliminates the pattern given in compressed columns, with the diagonal taken as full, always
/// next the row and column of least (r - 1)(c - 1), the most fill it can cause (Markowitz 1957,
/// Management Science 3, 255). Of equals the first is taken, so that the order is always the same.
pub(super) fn eliminate(count: usize, col_ptr: &[usize], row_idx: &[usize]) -> Elimination {
    let mut rows = vec![Bits::new(count); count];
    let mut columns = vec![Bits::new(count); count];
    let mut enter = |row: usize, column: usize| {
        rows[row].insert(column);
        columns[column].insert(row);
    };
    for (column, bounds) in col_ptr.windows(2).enumerate() {
        enter(column, column);
        row_idx[bounds[0]..bounds[1]]
            .iter()
            .for_each(|&row| enter(row, column));
    }
    let mut left: Vec<usize> = (0..count).collect();
    let mut order = Vec::with_capacity(count);
    let mut place = vec![0; count];
    let (mut upper, mut lower) = (vec![Vec::new(); count], vec![Vec::new(); count]);
    while let Some((at, &pivot)) = left
        .iter()
        .enumerate()
        .min_by_key(|&(_, &i)| (rows[i].count() - 1) * (columns[i].count() - 1))
    {
        left.remove(at);
        place[pivot] = order.len();
        order.push(pivot);
        // What is left of the pivot's row and column is its row of U and column of L.
        rows[pivot].remove(pivot);
        columns[pivot].remove(pivot);
        let (row, column) = (rows[pivot].clone(), columns[pivot].clone());
        for below in column.members() {
            rows[below].remove(pivot);
            rows[below].add(&row);
            lower[below].push(pivot);
        }
        upper[pivot] = row.members();
        for &right in &upper[pivot] {
            columns[right].remove(pivot);
            columns[right].add(&column);
        }
    }
    let by_place = |lists: &[Vec<usize>]| -> Vec<Vec<usize>> {
        let of = |&i: &usize| {
            let mut list: Vec<usize> = lists[i].iter().map(|&j| place[j]).collect();
            list.sort_unstable();
            list
        };
        order.iter().map(of).collect()
    };
    Elimination {
        upper: by_place(&upper),
        lower: by_place(&lower),
        order,
    }
}
