//! Work on all cores whose results don't depend on how many there are.

use std::sync::mpsc;
use std::thread;

/// So many items a core may be ahead of the results that are taken: enough to keep all cores busy, few enough to be held.
const AHEAD: usize = 16;

/// Works on items as they come and hands each result on as soon as it and all before it are there.
///
/// # Errors
/// The first that `items` or `take` gives; what was begun before a wrong item is still taken.
pub(crate) fn in_order<T: Send, R: Send, E>(
    items: impl Iterator<Item = Result<T, E>>,
    work: impl Fn(T) -> R + Sync,
    mut take: impl FnMut(R) -> Result<(), E>,
) -> Result<(), E> {
    let threads = thread::available_parallelism().map_or(1, usize::from);
    let work = &work;
    // Items go round the threads in turn, and so do the results: that alone keeps their order.
    thread::scope(|scope| {
        let lane = |_| {
            let (give, given) = mpsc::sync_channel::<T>(AHEAD);
            let (answer, answers) = mpsc::channel::<R>();
            // Nobody waits for answers once `take` has failed.
            scope.spawn(move || given.into_iter().all(|item| answer.send(work(item)).is_ok()));
            (give, answers)
        };
        let lanes: Vec<_> = (0..threads).map(lane).collect();
        let mut given = 0;
        let mut taken = 0;
        // A thread that answers no more has panicked, and so does the scope when it ends.
        let mut take_next = |taken: usize| lanes[taken % threads].1.recv().map_or(Ok(()), &mut take);
        let mut wrong = Ok(());
        for item in items {
            match item {
                Ok(item) => {
                    if given - taken == threads * AHEAD {
                        take_next(taken)?;
                        taken += 1;
                    }
                    if lanes[given % threads].0.send(item).is_err() {
                        break;
                    }
                    given += 1;
                }
                Err(error) => {
                    wrong = Err(error);
                    break;
                }
            }
        }
        (taken..given).try_for_each(take_next)?;
        wrong
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// What is taken of the squares of some numbers, and how it ends.
    fn squares(
        items: impl Iterator<Item = Result<u64, String>>,
        last: u64,
    ) -> (Vec<u64>, Result<(), String>) {
        let mut taken = Vec::new();
        let ended = in_order(
            items,
            |item| item * item,
            |square| {
                taken.push(square);
                if square == last { Err("enough".to_owned()) } else { Ok(()) }
            },
        );
        (taken, ended)
    }

    #[test]
    fn results_stand_in_the_order_of_the_items() {
        let expected: Vec<u64> = (0..1000).map(|item| item * item).collect();
        assert_eq!(squares((0..1000).map(Ok), 1), (vec![0, 1], Err("enough".to_owned())));
        assert_eq!(squares((0..1000).map(Ok), u64::MAX), (expected, Ok(())));
        assert_eq!(squares(std::iter::empty(), 0), (vec![], Ok(())));
    }

    #[test]
    fn what_comes_before_a_wrong_item_is_taken() {
        let items = (0..500).map(|item| if item == 400 { Err("wrong".to_owned()) } else { Ok(item) });
        let (taken, ended) = squares(items, u64::MAX);
        assert_eq!((taken.len(), ended), (400, Err("wrong".to_owned())));
    }
}
