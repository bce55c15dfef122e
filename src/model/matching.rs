//! Pairs labels with loads so that the sum of all costs is least: a sparse assignment by shortest augmenting paths.
//!
//! Every label (a *row*) takes at most one load (a *column*) and every load at most one label. A pair costs what the
//! caller says; a label that takes no load costs its `reach`, so no pair dearer than that is ever made. The method is
//! the successive shortest path method with dual prices [Jonker and Volgenant 1987]; it works on the cheapest few
//! columns of each row and widens that choice until the dual prices prove that no pair left out could do better.

use std::cmp::Ordering;
use std::collections::BinaryHeap;

use crate::tolerance;

/// Columns that a row begins with.
const FIRST_CHOICE: usize = 8;

/// One row: what it costs to leave it out, and how far an alternative may cost more and still be told.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Row {
    /// Cost of leaving the row without a column; no dearer pair is made. Same unit as the costs of pairs.
    pub reach: f64,
    /// Alternatives that raise the whole sum by less than this are told.
    pub doubt: f64,
}

/// Another complete pairing in which one row takes another column, and the least it raises the sum by.
#[derive(Debug, Clone, PartialEq)]
pub struct Alternative {
    /// The row concerned.
    pub row: usize,
    /// Every row that changes, with the column it takes instead (`None`: it is left out).
    pub changes: Vec<(usize, Option<usize>)>,
    /// By how much the sum of costs grows.
    pub increase: f64,
}

/// The least pairing.
#[derive(Debug, Clone, PartialEq)]
pub struct Pairing {
    /// The column of each row.
    pub column_of: Vec<Option<usize>>,
    /// Sum of the costs of all pairs and of the reaches of the rows left out.
    pub total: f64,
    /// What the dual prices sum to: a lower bound of every pairing's total, equal to `total` but for rounding.
    pub bound: f64,
    /// Close alternatives for rows that have a column, in the order of the rows.
    pub alternatives: Vec<Alternative>,
}

/// Alternatives of one row that are looked for.
const ALTERNATIVES: usize = 3;

/// Rows and columns crowd so closely that no pairing can be found in reasonable time.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Crowded;

/// Finds the least pairing. `nearest(row, count)` gives the `count` cheapest columns of the row as `(cost, column)` in
/// ascending order, only those that cost less than its reach, and fewer than `count` only when there are no more.
///
/// Of the close alternatives of a row those are told that begin with its three nearest other columns.
///
/// # Errors
/// [`Crowded`] when rows compete for hundreds of columns at once.
pub fn pair(
    rows: &[Row],
    columns: usize,
    mut nearest: impl FnMut(usize, usize) -> Vec<(f64, usize)>,
) -> Result<Pairing, Crowded> {
    let mut counts = vec![FIRST_CHOICE; rows.len()];
    let mut choices: Vec<Vec<(f64, usize)>> = (0..rows.len()).map(|row| nearest(row, FIRST_CHOICE)).collect();
    loop {
        let mut solver = Solver::new(rows, &choices, columns);
        for row in 0..rows.len() {
            solver.augment(row)?;
        }
        // A pair left out costs at least as much as the dearest one looked at; prices of columns are never positive, so
        // it can only help a row whose own price exceeds that.
        let short: Vec<usize> = (0..rows.len())
            .filter(|&row| {
                let choice = &choices[row];
                choice.len() >= counts[row]
                    && choice
                        .last()
                        .is_some_and(|&(dearest, _)| dearest < solver.row_price[row] + rows[row].doubt)
            })
            .collect();
        if short.is_empty() {
            return solver.finish();
        }
        for row in short {
            counts[row] *= 2;
            if counts[row] > tolerance::LABEL_CHOICES {
                return Err(Crowded);
            }
            choices[row] = nearest(row, counts[row]);
        }
    }
}

/// A node on the search front: a column, or the place outside of all columns for the row it was reached from.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Front {
    distance: f64,
    /// A place that ends the search; among equals such a one is taken first.
    free: bool,
    from: usize,
    column: Option<usize>,
}

impl Eq for Front {}

impl Ord for Front {
    fn cmp(&self, other: &Self) -> Ordering {
        // The heap gives the greatest first: nearest, then lowest numbers, so that ties do not depend on chance.
        other
            .distance
            .total_cmp(&self.distance)
            .then_with(|| self.free.cmp(&other.free))
            .then_with(|| other.column.cmp(&self.column))
            .then_with(|| other.from.cmp(&self.from))
    }
}

impl PartialOrd for Front {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

/// What a search left behind.
struct Search {
    /// Columns taken off the front, with their distance, in order.
    settled: Vec<(usize, f64)>,
    /// Where the search ended: the row that makes the last step, its new column (`None`: left out), the distance.
    end: Option<(usize, Option<usize>, f64)>,
}

struct Solver<'a> {
    rows: &'a [Row],
    choices: &'a [Vec<(f64, usize)>],
    column_of: Vec<Option<usize>>,
    row_of: Vec<Option<usize>>,
    row_price: Vec<f64>,
    column_price: Vec<f64>,
    /// Row from which each column was reached in the search under way, and the distance; valid where `stamp` is current.
    reached: Vec<(usize, f64)>,
    stamp: Vec<u64>,
    done: Vec<u64>,
    clock: u64,
    steps: u64,
}

impl<'a> Solver<'a> {
    fn new(rows: &'a [Row], choices: &'a [Vec<(f64, usize)>], columns: usize) -> Self {
        Self {
            rows,
            choices,
            column_of: vec![None; rows.len()],
            row_of: vec![None; columns],
            row_price: vec![0.0; rows.len()],
            column_price: vec![0.0; columns],
            reached: vec![(0, 0.0); columns],
            stamp: vec![0; columns],
            done: vec![0; columns],
            clock: 0,
            steps: 0,
        }
    }

    /// Cheapest way from `start` to a free place, in reduced costs, all below `bound`. `barred` is a column that `start`
    /// itself may not take; when `first` is given, `start` may take only that column. `goal` is a column that counts as
    /// free; any other free place costs `elsewhere` more.
    fn search(
        &mut self,
        start: usize,
        first: Option<usize>,
        goal: Option<usize>,
        elsewhere: f64,
        bound: f64,
    ) -> Result<Search, Crowded> {
        self.clock += 1;
        let mut front = BinaryHeap::new();
        let mut settled = Vec::new();
        let mut row = start;
        let mut base = 0.0;
        let choices = self.choices;
        loop {
            self.steps += 1 + choices[row].len() as u64;
            if self.steps > tolerance::PAIRING_STEPS {
                return Err(Crowded);
            }
            let price = self.row_price[row];
            let out = base + (self.rows[row].reach - price).max(0.0) + elsewhere;
            if (row != start || first.is_none()) && out < bound {
                front.push(Front { distance: out, free: false, from: row, column: None });
            }
            for &(cost, column) in &choices[row] {
                if self.done[column] == self.clock
                    || self.column_of[row] == Some(column)
                    || (row == start && first.is_some_and(|f| f != column))
                {
                    continue;
                }
                let mut distance = base + (cost - price - self.column_price[column]).max(0.0);
                if self.row_of[column].is_none() && goal != Some(column) {
                    distance += elsewhere;
                }
                let better = self.stamp[column] != self.clock || distance < self.reached[column].1;
                if better && distance < bound {
                    self.stamp[column] = self.clock;
                    self.reached[column] = (row, distance);
                    let free = goal == Some(column) || self.row_of[column].is_none();
                    front.push(Front { distance, free, from: row, column: Some(column) });
                }
            }
            loop {
                let Some(next) = front.pop() else {
                    return Ok(Search { settled, end: None });
                };
                let Some(column) = next.column else {
                    return Ok(Search { settled, end: Some((next.from, None, next.distance)) });
                };
                if self.done[column] == self.clock || self.reached[column].0 != next.from {
                    continue;
                }
                if goal == Some(column) || self.row_of[column].is_none() {
                    return Ok(Search { settled, end: Some((next.from, Some(column), next.distance)) });
                }
                self.done[column] = self.clock;
                settled.push((column, next.distance));
                if let Some(holder) = self.row_of[column] {
                    row = holder;
                    base = next.distance;
                    break;
                }
            }
        }
    }

    /// The rows that change along a search's way, from its end back to `start`, with their new columns.
    fn way(&self, start: usize, last: usize, column: Option<usize>) -> Vec<(usize, Option<usize>)> {
        let mut changes = vec![(last, column)];
        let mut row = last;
        while row != start {
            // The row was reached through the column that it holds.
            let Some(held) = self.column_of[row] else {
                break;
            };
            let from = self.reached[held].0;
            changes.push((from, Some(held)));
            row = from;
        }
        changes
    }

    fn augment(&mut self, start: usize) -> Result<(), Crowded> {
        // The row's price starts at its cheapest choice, so that all its reduced costs are not negative.
        let cheapest = self.choices[start]
            .iter()
            .map(|&(cost, column)| cost - self.column_price[column])
            .fold(self.rows[start].reach, f64::min);
        self.row_price[start] = cheapest;
        let search = self.search(start, None, None, 0.0, f64::INFINITY)?;
        let Some((last, column, length)) = search.end else {
            return Ok(());
        };
        self.row_price[start] += length;
        for &(settled, distance) in &search.settled {
            self.column_price[settled] -= length - distance;
            if let Some(holder) = self.row_of[settled] {
                self.row_price[holder] += length - distance;
            }
        }
        let changes = self.way(start, last, column);
        for &(row, new) in &changes {
            self.column_of[row] = new;
            if let Some(new) = new {
                self.row_of[new] = Some(row);
            }
        }
        Ok(())
    }

    /// For every column, the least that the sum of costs grows by when its row has left it: it stays empty, or a row that
    /// was left out takes it, or another row does whose own column is then empty in turn. With the row that takes it.
    fn vacate(&self) -> Vec<(f64, Option<usize>)> {
        let mut least = vec![(f64::INFINITY, None); self.row_of.len()];
        let mut front = BinaryHeap::new();
        for (column, holder) in self.row_of.iter().enumerate() {
            if holder.is_some() {
                least[column] = ((-self.column_price[column]).max(0.0), None);
            }
        }
        for (row, held) in self.column_of.iter().enumerate() {
            if held.is_none() {
                self.relax(row, 0.0, &mut least);
            }
        }
        for (column, &(distance, _)) in least.iter().enumerate() {
            if distance.is_finite() {
                front.push(Front { distance, free: false, from: 0, column: Some(column) });
            }
        }
        while let Some(Front { distance, column: Some(column), .. }) = front.pop() {
            if distance > least[column].0 {
                continue;
            }
            let Some(holder) = self.row_of[column] else {
                continue;
            };
            for improved in self.relax(holder, distance, &mut least) {
                front.push(Front {
                    distance: least[improved].0,
                    free: false,
                    from: 0,
                    column: Some(improved),
                });
            }
        }
        least
    }

    /// Lets `row` take each of its columns after `base`; the columns for which that is the best way so far.
    fn relax(&self, row: usize, base: f64, least: &mut [(f64, Option<usize>)]) -> Vec<usize> {
        let mut improved = Vec::new();
        for &(cost, column) in &self.choices[row] {
            if self.row_of[column].is_none() || self.column_of[row] == Some(column) {
                continue;
            }
            let step = (cost - self.row_price[row] - self.column_price[column]).max(0.0);
            if base + step < least[column].0 {
                least[column] = (base + step, Some(row));
                improved.push(column);
            }
        }
        improved
    }

    /// Adds the changes by which the column that was left is filled again.
    fn fill(&self, left: usize, vacated: &[(f64, Option<usize>)], changes: &mut Vec<(usize, Option<usize>)>) {
        let mut column = left;
        while let Some(row) = vacated[column].1 {
            // A row that has moved already takes this column instead, and what moved after it stays where it was.
            if let Some(at) = changes.iter().position(|c| c.0 == row) {
                changes.truncate(at);
                changes.push((row, Some(column)));
                return;
            }
            changes.push((row, Some(column)));
            match self.column_of[row] {
                Some(next) => column = next,
                None => return,
            }
        }
    }

    fn finish(mut self) -> Result<Pairing, Crowded> {
        let cost =
            |row: usize, column: usize| self.choices[row].iter().find(|c| c.1 == column).map_or(0.0, |c| c.0);
        let total = (0..self.rows.len())
            .map(|row| match self.column_of[row] {
                Some(column) => cost(row, column),
                None => self.rows[row].reach,
            })
            .sum();
        let bound = self.row_price.iter().sum::<f64>() + self.column_price.iter().sum::<f64>();
        let mut alternatives = Vec::new();
        let vacated = self.vacate();
        for row in 0..self.rows.len() {
            let Some(held) = self.column_of[row] else {
                continue;
            };
            let doubt = self.rows[row].doubt;
            let freed = vacated[held].0;
            for &(cost, other) in self.choices[row].iter().filter(|c| c.1 != held).take(ALTERNATIVES) {
                let step = cost - self.row_price[row] - self.column_price[other];
                if step >= doubt {
                    continue;
                }
                let search = self.search(row, Some(other), Some(held), freed, doubt)?;
                if let Some((last, column, increase)) = search.end {
                    let mut changes = self.way(row, last, column);
                    changes.reverse();
                    if column != Some(held) {
                        self.fill(held, &vacated, &mut changes);
                    }
                    alternatives.push(Alternative { row, changes, increase });
                }
            }
        }
        Ok(Pairing { column_of: self.column_of, total, bound, alternatives })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn solve(costs: &[Vec<f64>], reach: f64, doubt: f64) -> Pairing {
        let rows = vec![Row { reach, doubt }; costs.len()];
        let columns = costs.first().map_or(0, Vec::len);
        pair(&rows, columns, |row, count| {
            let mut all: Vec<(f64, usize)> =
                costs[row].iter().copied().zip(0..).filter(|c| c.0 < reach).collect();
            all.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
            all.truncate(count);
            all
        })
        .unwrap()
    }

    /// Least total by trying everything.
    fn brute(costs: &[Vec<f64>], reach: f64, fixed: Option<(usize, usize)>) -> f64 {
        fn go(
            costs: &[Vec<f64>],
            reach: f64,
            fixed: Option<(usize, usize)>,
            row: usize,
            used: &mut Vec<bool>,
        ) -> f64 {
            if row == costs.len() {
                return 0.0;
            }
            let forced = fixed.filter(|f| f.0 == row).map(|f| f.1);
            let mut best =
                if forced.is_none() { reach + go(costs, reach, fixed, row + 1, used) } else { f64::INFINITY };
            for column in 0..used.len() {
                if used[column] || costs[row][column] >= reach || forced.is_some_and(|f| f != column) {
                    continue;
                }
                used[column] = true;
                best = best.min(costs[row][column] + go(costs, reach, fixed, row + 1, used));
                used[column] = false;
            }
            best
        }
        go(costs, reach, fixed, 0, &mut vec![false; costs[0].len()])
    }

    #[test]
    fn greedy_would_be_wrong() {
        // Greedy takes row 0 to column 1 at 1.0 and leaves row 1 with 9.0.
        let p = solve(&[vec![1.5, 1.0], vec![9.0, 1.2]], 20.0, 0.1);
        assert_eq!(p.column_of, [Some(0), Some(1)]);
        assert!((p.total - 2.7).abs() < 1e-12 && (p.bound - p.total).abs() < 1e-12);
        assert!(p.alternatives.is_empty());
    }

    #[test]
    fn far_rows_are_left_out() {
        let p = solve(&[vec![1.0, 6.0], vec![5.5, 7.0]], 5.0, 0.0);
        assert_eq!(p.column_of, [Some(0), None]);
    }

    #[test]
    fn close_alternatives_are_told() {
        let p = solve(&[vec![1.0, 1.05], vec![1.02, 1.0]], 5.0, 0.2);
        assert_eq!(p.column_of, [Some(0), Some(1)]);
        assert_eq!(p.alternatives.len(), 2);
        assert_eq!(p.alternatives[0].changes, [(0, Some(1)), (1, Some(0))]);
        assert!((p.alternatives[0].increase - 0.07).abs() < 1e-12);
    }

    #[test]
    fn many_rows_on_one_spot_end() {
        // Everything within reach of everything, and nearly equal.
        let n = 200;
        let costs: Vec<Vec<f64>> = (0..n)
            .map(|i| (0..n).map(|j| 5.0 + ((i * 7919 + j * 104_729) % 1000) as f64 * 1e-3).collect())
            .collect();
        let p = solve(&costs, 10.0, 0.0);
        assert!((p.total - p.bound).abs() < 1e-9 * p.total);
        assert!(p.column_of.iter().all(Option::is_some));
    }

    proptest! {
        #[test]
        fn as_good_as_trying_everything(
            (costs, reach) in (1usize..6, 1usize..6).prop_flat_map(|(n, m)| {
                (prop::collection::vec(prop::collection::vec(0.0f64..10.0, m), n), 1.0f64..12.0)
            })
        ) {
            let doubt = 3.0;
            let p = solve(&costs, reach, doubt);
            let best = brute(&costs, reach, None);
            prop_assert!((p.total - best).abs() < 1e-9, "{} {}", p.total, best);
            prop_assert!((p.bound - best).abs() < 1e-9, "{} {}", p.bound, best);
            // Every alternative below the doubt is told, with its exact increase.
            for (row, held) in p.column_of.iter().enumerate() {
                let Some(held) = *held else { continue };
                for other in 0..costs[0].len() {
                    if other == held || costs[row][other] >= reach {
                        continue;
                    }
                    let increase = brute(&costs, reach, Some((row, other))) - best;
                    let nearer = (0..costs[0].len())
                        .filter(|&c| c != held && (costs[row][c], c) < (costs[row][other], other));
                    if nearer.count() >= ALTERNATIVES {
                        continue;
                    }
                    let told = p.alternatives.iter().find(|a| a.row == row && a.changes.contains(&(row, Some(other))));
                    match told {
                        Some(a) => prop_assert!((a.increase - increase).abs() < 1e-9),
                        None => prop_assert!(increase > doubt - 1e-9, "{increase} not told"),
                    }
                }
            }
        }
    }
}
