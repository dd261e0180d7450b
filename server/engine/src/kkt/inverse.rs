//! The inverse on the factor's pattern, by Takahashi's recursion.
//!
//! With `K = L D L'` in blocks, `Z = K^-1` satisfies `Z = D^-1 L^-1 + (I - L') Z` (K. Takahashi, J. Fagan and M.-S.
//! Chin, "Formation of a sparse bus impedance matrix and its application to short circuit study", PICA 1973; A. M.
//! Erisman and W. F. Tinney, "On computing certain elements of the inverse of a sparse matrix", CACM 18, 1975). For a
//! pivot `k` with the front `U` that reads `Z_Uk = -Z_UU L_Uk` and `Z_kk = D_k^-1 - Z_Uk' L_Uk`, pivots backwards, and
//! `Z_UU` lies on the pattern because `U` was filled in when `k` was eliminated.
//!
//! The diagonal of `Z` over the variables is the variance of their estimates: for a pair `D^-1` has nothing where the
//! variable stands unless its equation is softened, so the variances of unmeasured variables are sums of positive terms.

use std::sync::Arc;

use meterwright_thermo::Scalar;

use super::analysis::{ABSENT, Analysis};
use super::factor::{Factor, FactorError};
use super::tape::Kind;

/// The entries of the inverse that lie on the pattern of the factor.
#[derive(Clone, Debug)]
pub struct SelectedInverse<S> {
    analysis: Arc<Analysis>,
    storage: Vec<S>,
}

impl<S: Scalar> SelectedInverse<S> {
    /// The variance of the estimate of a column; zero for fixed and held columns and for those that don't exist.
    pub fn variance(&self, column: usize) -> S {
        let position = self.analysis.column_position.get(column).copied().unwrap_or(ABSENT);
        let place = self.analysis.diagonal.get(position as usize);
        place.map_or(S::constant(0.0), |place| self.storage[*place as usize])
    }

    /// The covariance of the estimates of two columns: zero when either is fixed or held, none when the entry isn't on
    /// the pattern and must be had by a solve.
    pub fn covariance(&self, a: usize, b: usize) -> Option<S> {
        let positions = [a, b].map(|column| self.analysis.column_position.get(column).copied());
        match positions {
            [Some(a), Some(b)] if a != ABSENT && b != ABSENT => {
                self.analysis.tape.locate(a, b).map(|place| self.storage[place])
            }
            _ => Some(S::constant(0.0)),
        }
    }
}

impl<S: Scalar> Factor<S> {
    /// The inverse on the pattern of the factor.
    ///
    /// # Errors
    /// [`FactorError::Unfactored`] without a factor.
    pub fn selected_inverse(&self) -> Result<SelectedInverse<S>, FactorError> {
        self.check_ready()?;
        let mut storage = vec![S::constant(0.0); self.analysis.tape.stored];
        let tape = &self.analysis.tape;
        let mut factor = &self.storage[..];
        let mut tape_rest = &tape.destination[..];
        for step in tape.steps.iter().rev() {
            let (rest, block) = factor.split_at(factor.len() - step.stored());
            let (tape_before, places) = tape_rest.split_at(tape_rest.len() - step.updates());
            let (_, own) = storage.split_at_mut(step.storage as usize);
            let (own, tail) = own.split_at_mut(step.stored());
            match step.kind {
                Kind::Variable | Kind::Equation => invert_single(block, own, tail, places),
                Kind::Pair(_) => invert_pair(block, own, tail, places),
            }
            factor = rest;
            tape_rest = tape_before;
        }
        Ok(SelectedInverse { analysis: Arc::clone(&self.analysis), storage })
    }
}

/// One pivot of width one; `own` is zero before.
#[inline]
fn invert_single<S: Scalar>(block: &[S], own: &mut [S], tail: &[S], places: &[u32]) {
    let (Some((pivot, factor)), Some((head, panel))) = (block.split_first(), own.split_first_mut()) else {
        return;
    };
    let mut remaining = &mut *panel;
    let mut factor_rest = factor;
    let mut places = places;
    while let (Some((sum, sums)), Some((own, others))) =
        (remaining.split_first_mut(), factor_rest.split_first())
    {
        let (first, run) = places.split_at(1);
        let (run, rest) = run.split_at(others.len());
        let mut total = *sum - *own * tail[first[0] as usize];
        for ((&place, multiplier), sum) in run.iter().zip(others).zip(&mut *sums) {
            let known = tail[place as usize];
            total -= *multiplier * known;
            *sum -= *own * known;
        }
        *sum = total;
        remaining = sums;
        factor_rest = others;
        places = rest;
    }
    let mut diagonal = *pivot;
    for (sum, multiplier) in panel.iter().zip(factor) {
        diagonal -= *sum * *multiplier;
    }
    *head = diagonal;
}

/// One pair; `own` is zero before.
#[inline]
fn invert_pair<S: Scalar>(block: &[S], own: &mut [S], tail: &[S], places: &[u32]) {
    let (Some((pivot, factor)), Some((head, panel))) =
        (block.split_first_chunk::<3>(), own.split_first_chunk_mut::<3>())
    else {
        return;
    };
    let (factor, _) = factor.as_chunks::<2>();
    let (panel, _) = panel.as_chunks_mut::<2>();
    let mut remaining = &mut *panel;
    let mut factor_rest = factor;
    let mut places = places;
    while let (Some((sum, sums)), Some((own, others))) =
        (remaining.split_first_mut(), factor_rest.split_first())
    {
        let (first, run) = places.split_at(1);
        let (run, rest) = run.split_at(others.len());
        let known = tail[first[0] as usize];
        let mut total = [sum[0] - own[0] * known, sum[1] - own[1] * known];
        for ((&place, multiplier), sum) in run.iter().zip(others).zip(&mut *sums) {
            let known = tail[place as usize];
            total[0] -= multiplier[0] * known;
            total[1] -= multiplier[1] * known;
            sum[0] -= own[0] * known;
            sum[1] -= own[1] * known;
        }
        *sum = total;
        remaining = sums;
        factor_rest = others;
        places = rest;
    }
    let mut diagonal = *pivot;
    for (sum, multiplier) in panel.iter().zip(factor) {
        diagonal[0] -= sum[0] * multiplier[0];
        diagonal[1] -= sum[0] * multiplier[1];
        diagonal[2] -= sum[1] * multiplier[1];
    }
    *head = diagonal;
}
