//! Symmetric positive definite systems whose unknowns couple only with their neighbours, perhaps around a ring.

use nalgebra::{Cholesky, Const, SMatrix};

/// A symmetric block tridiagonal matrix with blocks of `N` by `N`; around a ring the last block couples with the
/// first as well.
///
/// `N = 1` is a tridiagonal matrix, `N = 2` holds any pentadiagonal one, two unknowns to a block.
#[derive(Clone, Debug)]
pub struct BlockTridiagonal<const N: usize> {
    /// The diagonal blocks.
    pub diagonal: Vec<SMatrix<f64, N, N>>,
    /// `coupling[i]` stands in the rows of the next block and the columns of block `i`; around a ring the next block
    /// of the last is the first, otherwise the last coupling means nothing.
    pub coupling: Vec<SMatrix<f64, N, N>>,
    /// True when the last block couples with the first.
    pub ring: bool,
}

/// A block tridiagonal matrix ready to solve with: its block L D L^T factors.
#[derive(Clone, Debug)]
pub struct Factored<const N: usize> {
    pivots: Vec<Cholesky<f64, Const<N>>>,
    /// Coupling times inverse pivot: what a block takes from the one before it.
    below: Vec<SMatrix<f64, N, N>>,
    /// The same for the last block of a ring, which takes from every block; empty otherwise.
    last_row: Vec<SMatrix<f64, N, N>>,
}

impl<const N: usize> BlockTridiagonal<N> {
    /// The zero matrix of `blocks` blocks.
    pub fn zeros(blocks: usize, ring: bool) -> Self {
        Self { diagonal: vec![SMatrix::zeros(); blocks], coupling: vec![SMatrix::zeros(); blocks], ring }
    }

    /// Factors the matrix in time proportional to its blocks; `None` where it is not positive definite, or where a
    /// ring has fewer than two blocks.
    pub fn factor(mut self) -> Option<Factored<N>> {
        if self.ring { self.factor_ring() } else { self.factor_chain() }
    }

    fn factor_chain(&mut self) -> Option<Factored<N>> {
        let blocks = self.diagonal.len();
        let mut factored = Factored::with_capacity(blocks);
        for i in 0..blocks {
            let pivot = Cholesky::new(self.diagonal[i])?;
            if i + 1 < blocks {
                let below = divided(&pivot, &self.coupling[i]);
                self.diagonal[i + 1] -= below * self.coupling[i].transpose();
                factored.below.push(below);
            }
            factored.pivots.push(pivot);
        }
        Some(factored)
    }

    /// Eliminates every block but the last, whose row fills in as the elimination goes round.
    fn factor_ring(&mut self) -> Option<Factored<N>> {
        let last = self.diagonal.len().checked_sub(1).filter(|&last| last > 0)?;
        let mut factored = Factored::with_capacity(last + 1);
        let mut to_last = self.coupling[last].transpose();
        for i in 0..last {
            let pivot = Cholesky::new(self.diagonal[i])?;
            let to_next = if i + 1 < last {
                self.coupling[i]
            } else {
                to_last += self.coupling[i];
                SMatrix::zeros()
            };
            let below = divided(&pivot, &to_next);
            let row = divided(&pivot, &to_last);
            self.diagonal[i + 1] -= below * to_next.transpose();
            self.diagonal[last] -= row * to_last.transpose();
            to_last = -row * to_next.transpose();
            factored.below.push(below);
            factored.last_row.push(row);
            factored.pivots.push(pivot);
        }
        factored.pivots.push(Cholesky::new(self.diagonal[last])?);
        Some(factored)
    }
}

/// `coupling` times the inverse of the pivot.
fn divided<const N: usize>(
    pivot: &Cholesky<f64, Const<N>>,
    coupling: &SMatrix<f64, N, N>,
) -> SMatrix<f64, N, N> {
    pivot.solve(&coupling.transpose()).transpose()
}

impl<const N: usize> Factored<N> {
    fn with_capacity(blocks: usize) -> Self {
        Self { pivots: Vec::with_capacity(blocks), below: Vec::with_capacity(blocks), last_row: Vec::new() }
    }

    /// Replaces the right-hand side, one block of `M` columns for each block of the matrix, by the solution.
    ///
    /// # Panics
    /// When there are fewer right-hand blocks than blocks of the matrix.
    pub fn solve<const M: usize>(&self, rhs: &mut [SMatrix<f64, N, M>]) {
        let Some(last) = self.pivots.len().checked_sub(1) else { return };
        for i in 0..last {
            let taken = rhs[i];
            rhs[i + 1] -= self.below[i] * taken;
            if let Some(row) = self.last_row.get(i) {
                rhs[last] -= row * taken;
            }
        }
        self.pivots[last].solve_mut(&mut rhs[last]);
        for i in (0..last).rev() {
            self.pivots[i].solve_mut(&mut rhs[i]);
            let next = rhs[i + 1];
            rhs[i] -= self.below[i].tr_mul(&next);
            if let Some(row) = self.last_row.get(i) {
                let end = rhs[last];
                rhs[i] -= row.tr_mul(&end);
            }
        }
    }
}
