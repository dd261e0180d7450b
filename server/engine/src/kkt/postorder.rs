//! The pivot sequence rearranged so that what belongs together lies together.
//!
//! A pivot's parent is the earliest pivot that eliminates a node of its front; whatever else it touches is eliminated
//! by ancestors. Any order with children before parents makes the same factor (J. W. H. Liu, "The role of elimination
//! trees in sparse factorization", SIAM J. Matrix Anal. Appl. 11, 1990, section 3). Minimum degree hops from one end of
//! the plant to the other; in postorder every machine, and then every unit, is finished before the next is begun, so
//! that the numbers that a pivot updates are still in the processor's cache.

use super::ordering::Pivot;

/// The same pivots with every subtree of the elimination tree in one piece.
pub(super) fn postordered(pivots: Vec<Pivot>, nodes: usize) -> Vec<Pivot> {
    let mut step_of = vec![usize::MAX; nodes];
    for (step, pivot) in pivots.iter().enumerate() {
        for node in std::iter::once(pivot.first).chain(pivot.second) {
            step_of[node as usize] = step;
        }
    }
    let root = pivots.len();
    let mut children = vec![Vec::new(); root + 1];
    for (step, pivot) in pivots.iter().enumerate() {
        let parent = pivot.front.iter().map(|node| step_of[*node as usize]).min().unwrap_or(root);
        children[parent].push(step);
    }
    // Walked from the root with the latest child first, a tree comes out in reverse postorder.
    let mut order = Vec::with_capacity(root);
    let mut open = vec![root];
    while let Some(step) = open.pop() {
        order.push(step);
        open.append(&mut children[step]);
    }
    let mut pivots: Vec<Option<Pivot>> = pivots.into_iter().map(Some).collect();
    order.iter().rev().filter_map(|step| pivots.get_mut(*step)?.take()).collect()
}
