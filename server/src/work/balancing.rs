//! The work on one log, on threads of its own: read it, find its periods, balance them.

use std::path::PathBuf;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

use jiff::Timestamp;
use tokio::sync::mpsc::Sender;

use super::saved::{Shape, series};
use crate::found::{Found, PeriodChoice};
use crate::log::{Log, LogFaults};
use crate::parallel;
use crate::period::{Period, Periods, Window};
use crate::ready::{ReadyPlant, counters};
use crate::record::Layout;
use crate::store::{LogEntry, LogFaultLine, NewBalance, Place, Said, Seen};

/// Balances go to the store together: so many at most,
const BATCH: usize = 1024;
/// and none waits longer than this.
const PATIENCE: Duration = Duration::from_millis(500);

/// Everything it takes to work on a log.
pub(super) struct Job {
    pub(super) log: LogEntry,
    pub(super) file: PathBuf,
    /// Revisions of the plant file and when each is in force.
    pub(super) plants: Vec<(u32, Arc<ReadyPlant>, Window)>,
    pub(super) false_alarm_rate: f64,
    /// Periods that have a balance already.
    pub(super) seen: Seen,
    pub(super) cancelled: Arc<AtomicBool>,
}

/// What there is to store.
pub(super) enum Message {
    /// Stretches of the log, beginning, end and why one can't be balanced; and how many can be, if more are to come.
    Periods(Vec<(Timestamp, Timestamp, Option<String>)>, Option<usize>),
    /// Balances.
    Balances(Arc<Place>, Vec<NewBalance>),
}

/// How the work has ended.
pub(super) enum Ended {
    Done(Said),
    Failed(Said),
    Cancelled(Said),
}

/// Why it ended early.
enum Stop {
    Cancelled,
    Faults(LogFaults),
    Said(Said),
}

impl From<LogFaults> for Stop {
    fn from(faults: LogFaults) -> Self {
        Self::Faults(faults)
    }
}

impl Job {
    pub(super) fn run(&self, sender: &Sender<Message>) -> Ended {
        let mut said = Said::default();
        match self.work(sender, &mut said) {
            Ok(()) => Ended::Done(said),
            Err(Stop::Cancelled) => Ended::Cancelled(said),
            Err(Stop::Faults(faults)) => {
                told(&faults, &mut said);
                Ended::Failed(said)
            }
            Err(Stop::Said(failure)) => Ended::Failed(Said { notes: said.notes, ..failure }),
        }
    }

    fn work(&self, sender: &Sender<Message>, said: &mut Said) -> Result<(), Stop> {
        let mut stretches = 0;
        for (revision, ready, window) in &self.plants {
            let log = Log::open(&self.file, ready.expectation.clone())?;
            for note in log.notes().iter().map(|note| note.message.clone()) {
                if !said.notes.contains(&note) {
                    said.notes.push(note);
                }
            }
            if let Some(fault) = counters(&ready.plant, &log).first() {
                return Err(Stop::Said(Said { reason: Some(fault.to_string()), ..Said::default() }));
            }
            stretches += self.segment(*revision, ready, &log, *window, sender, said)?;
        }
        if stretches == 0 && said.reason.is_none() {
            said.reason =
                Some("the log has no row that a revision of the plant file is in force for".to_owned());
        }
        Ok(())
    }

    /// Balances what of the log one revision is in force for; the number of stretches found.
    fn segment(
        &self,
        revision: u32,
        ready: &ReadyPlant,
        log: &Log,
        window: Window,
        sender: &Sender<Message>,
        said: &mut Said,
    ) -> Result<usize, Stop> {
        let found = Found::of(self.log.periods, &ready.plant, log, window)?;
        said.notes.extend(found.summary.iter().cloned().chain(found.silent.iter().map(ToString::to_string)));
        let zone = &ready.expectation.zone;
        let rejected = found.rejections.iter();
        let mut stretches: Vec<_> =
            rejected.map(|stretch| (stretch.from, stretch.to, Some(stretch.told(zone)))).collect();
        let rejected = stretches.len();
        let mut periods = found.periods;
        if self.log.periods != PeriodChoice::Row {
            // They are held anyway. Rows are not: those are told as they are balanced.
            let held = periods.collect::<Result<Vec<_>, _>>()?;
            stretches.extend(held.iter().map(|period| (period.from, period.to, None)));
            periods = Box::new(held.into_iter().map(Ok));
        }
        send(sender, Message::Periods(stretches, found.count))?;
        Ok(rejected + self.balance(revision, ready, periods, sender)?)
    }

    /// Balances what is not yet balanced of some periods; how many there are.
    fn balance(
        &self,
        revision: u32,
        ready: &ReadyPlant,
        periods: Periods<'_>,
        sender: &Sender<Message>,
    ) -> Result<usize, Stop> {
        let mut periods = periods.peekable();
        let anchor = match periods.peek() {
            Some(Ok(first)) => ready.compiled.anchor(&first.readings),
            Some(Err(faults)) => return Err(Stop::Faults(faults.clone())),
            None => return Ok(0),
        };
        let shape = Shape::new(ready, revision);
        let place = Arc::new(self.place(revision, &shape.layout(ready)));
        let mut batch = Batch { sender, place, balances: Vec::new(), since: Instant::now() };
        let mut count = 0;
        let open = periods.filter_map(|period| match period {
            _ if self.cancelled.load(Ordering::Relaxed) => Some(Err(Stop::Cancelled)),
            Ok(period) => {
                count += 1;
                (!self.is_seen(&period)).then_some(Ok(period))
            }
            Err(faults) => Some(Err(Stop::Faults(faults))),
        });
        let work = |period: Period| {
            let balance =
                ready.compiled.balance_and_search(&period.readings, anchor.as_ref(), self.false_alarm_rate);
            shape.saved(&period, &balance)
        };
        let worked = parallel::in_order(open, work, |balance| batch.add(balance));
        batch.send()?;
        worked.map(|()| count)
    }

    fn is_seen(&self, period: &Period) -> bool {
        self.seen.contains(&(period.from.as_millisecond(), period.to.as_millisecond()))
    }

    fn place(&self, revision: u32, layout: &Layout) -> Place {
        let layout_text = layout.to_text();
        Place {
            plant: self.log.plant.clone(),
            revision,
            log: self.log.id.clone(),
            layout: Layout::name_of(&layout_text),
            layout_text,
            series: series(layout),
            false_alarm_rate: self.false_alarm_rate,
        }
    }
}

/// Balances that go to the store together.
struct Batch<'s> {
    sender: &'s Sender<Message>,
    place: Arc<Place>,
    balances: Vec<NewBalance>,
    since: Instant,
}

impl Batch<'_> {
    fn add(&mut self, balance: NewBalance) -> Result<(), Stop> {
        self.balances.push(balance);
        let is_due = self.balances.len() >= BATCH || self.since.elapsed() >= PATIENCE;
        if is_due { self.send() } else { Ok(()) }
    }

    fn send(&mut self) -> Result<(), Stop> {
        self.since = Instant::now();
        if self.balances.is_empty() {
            return Ok(());
        }
        send(self.sender, Message::Balances(self.place.clone(), std::mem::take(&mut self.balances)))
    }
}

/// Hands something to the store; where nobody takes it, the work has been given up.
fn send(sender: &Sender<Message>, message: Message) -> Result<(), Stop> {
    sender.blocking_send(message).map_err(|_| Stop::Cancelled)
}

/// Tells the faults of a log.
fn told(faults: &LogFaults, said: &mut Said) {
    said.faults = faults
        .first
        .iter()
        .map(|fault| LogFaultLine {
            line: fault.line,
            column: fault.column as u64,
            message: fault.problem.to_string(),
        })
        .collect();
    let beyond = match faults.beyond {
        0 => String::new(),
        beyond => format!("; there are {beyond} more faults"),
    };
    said.reason = Some(format!("the log has faults: mend them and upload it again{beyond}"));
}
