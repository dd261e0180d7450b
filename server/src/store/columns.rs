//! Columns by quantity and day: what trends read.

use std::collections::{BTreeMap, HashMap};

use jiff::Timestamp;
use sqlx::SqliteConnection;

use super::balances::{NewBalance, Place};
use super::{Store, StoreError, millisecond, of_json};
use crate::record::{DayColumn, DayMarks, Layout, Mark};

/// A day, ms.
const DAY: i64 = 86_400_000;

/// One balance's point of a trend, SI; what is not known is not a number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendPoint {
    /// Balanced value.
    pub value: f32,
    /// Its standard uncertainty.
    pub sigma: f32,
    /// The part of it that is drawn anew each period.
    pub repeat_sigma: f32,
    /// Reading; of tags only.
    pub measured: f32,
}

/// What there is none of.
const NOTHING: TrendPoint =
    TrendPoint { value: f32::NAN, sigma: f32::NAN, repeat_sigma: f32::NAN, measured: f32::NAN };

/// Something that a trend can be shown of.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// Its name.
    pub name: String,
    /// What it is.
    pub kind: SeriesKind,
    /// Unit in which it is shown.
    pub unit: String,
    /// What it measures.
    pub measure: String,
    /// What it is, in words.
    pub description: String,
}

/// What a trend is of.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum SeriesKind {
    /// An indicator.
    Indicator,
    /// A tag.
    Tag,
    /// A quantity.
    Quantity,
}

/// One series over a stretch of time, in order of time.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct TrendData {
    /// Beginnings of the periods, ms since 1970.
    pub from: Vec<i64>,
    /// Ends.
    pub to: Vec<i64>,
    /// The points, SI.
    pub points: Vec<TrendPoint>,
    /// What tells balances apart, each where it begins to hold: the place of the first balance, and the mark.
    pub marks: Vec<(usize, Mark)>,
}

/// What is to change in the columns of one day.
#[derive(Default)]
pub(super) struct Day<'b> {
    removed: Vec<i64>,
    added: Vec<&'b NewBalance>,
}

/// Where a point of a column comes from.
#[derive(Clone, Copy)]
enum Source {
    Kept(usize),
    Added(usize),
}

impl<'b> Day<'b> {
    /// The day of a time, counted from 1970.
    pub(super) fn of(millisecond: i64) -> i64 {
        millisecond.div_euclid(DAY)
    }

    /// A balance that began then no longer counts.
    pub(super) fn remove(&mut self, from: i64) {
        self.removed.push(from);
    }

    /// A balance comes in.
    pub(super) fn add(&mut self, balance: &'b NewBalance) {
        self.added.push(balance);
    }

    /// Writes the day's columns anew.
    pub(super) async fn write(
        &self,
        place: &Place,
        day: i64,
        connection: &mut SqliteConnection,
    ) -> Result<(), StoreError> {
        const MARKS: &str = "SELECT marks FROM day_marks WHERE plant = $1 AND day = $2";
        const COLUMNS: &str = "SELECT series, measure, block FROM day_columns WHERE plant = $1 AND day = $2";
        const WRITE_MARKS: &str = "
            INSERT INTO day_marks (plant, day, marks) VALUES ($1, $2, $3)
            ON CONFLICT (plant, day) DO UPDATE SET marks = excluded.marks";
        const WRITE_COLUMN: &str = "
            INSERT INTO day_columns (plant, series, measure, day, block) VALUES ($1, $2, $3, $4, $5)
            ON CONFLICT (plant, series, measure, day) DO UPDATE SET block = excluded.block";
        let marks: Option<Vec<u8>> =
            sqlx::query_scalar(MARKS).bind(&place.plant).bind(day).fetch_optional(&mut *connection).await?;
        let before = marks.map_or(Ok(DayMarks::default()), |marks| DayMarks::unpack(&marks))?;
        let mut columns: BTreeMap<(String, String), DayColumn> = BTreeMap::new();
        if !before.from.is_empty() {
            let stored: Vec<(String, String, Vec<u8>)> =
                sqlx::query_as(COLUMNS).bind(&place.plant).bind(day).fetch_all(&mut *connection).await?;
            for (series, measure, block) in stored {
                columns.insert((series, measure), DayColumn::unpack(&block, before.from.len())?);
            }
        }
        let sources = self.sources(&before);
        let after = self.marks(&before, &sources);
        sqlx::query(WRITE_MARKS)
            .bind(&place.plant)
            .bind(day)
            .bind(after.pack())
            .execute(&mut *connection)
            .await?;
        let numbers: HashMap<&(String, String), usize> =
            if self.added.is_empty() { HashMap::new() } else { place.series.iter().zip(0..).collect() };
        for series in numbers.keys() {
            if !columns.contains_key(*series) {
                columns.insert((*series).clone(), DayColumn::default());
            }
        }
        for (series, column) in &columns {
            let column = self.column(column, numbers.get(series).copied(), &sources);
            sqlx::query(WRITE_COLUMN)
                .bind(&place.plant)
                .bind(&series.0)
                .bind(&series.1)
                .bind(day)
                .bind(column.pack())
                .execute(&mut *connection)
                .await?;
        }
        Ok(())
    }

    /// Where each of the day's balances comes from, in order of time.
    fn sources(&self, before: &DayMarks) -> Vec<Source> {
        let kept = before.from.iter().enumerate().filter(|(_, from)| !self.removed.contains(from));
        let added = self.added.iter().enumerate();
        let mut sources: Vec<(i64, Source)> = kept
            .map(|(place, from)| (*from, Source::Kept(place)))
            .chain(added.map(|(place, balance)| (millisecond(balance.from), Source::Added(place))))
            .collect();
        sources.sort_by_key(|(from, _)| *from);
        sources.into_iter().map(|(_, source)| source).collect()
    }

    fn marks(&self, before: &DayMarks, sources: &[Source]) -> DayMarks {
        let mut marks = DayMarks::default();
        for source in sources {
            match *source {
                Source::Kept(place) => {
                    marks.push(before.from[place], before.to[place], before.mark(place));
                }
                Source::Added(place) => {
                    let balance = self.added[place];
                    marks.push(millisecond(balance.from), millisecond(balance.to), &balance.mark);
                }
            }
        }
        marks
    }

    /// The column of a series, which the added balances may have a point of at this place.
    fn column(&self, before: &DayColumn, number: Option<usize>, sources: &[Source]) -> DayColumn {
        let mut column = DayColumn::default();
        for source in sources {
            let point = match *source {
                Source::Kept(place) => point(before, place),
                Source::Added(place) => {
                    number.and_then(|number| self.added[place].points.get(number)).copied().unwrap_or(NOTHING)
                }
            };
            column.values.push(point.value);
            column.sigmas.push(point.sigma);
            column.repeat_sigmas.push(point.repeat_sigma);
            column.measured.push(point.measured);
        }
        if column.measured.iter().all(|measured| measured.is_nan()) {
            column.measured.clear();
        }
        column
    }
}

/// One point of a column; nothing where the column doesn't have it.
fn point(column: &DayColumn, place: usize) -> TrendPoint {
    let of = |numbers: &[f32]| numbers.get(place).copied().unwrap_or(f32::NAN);
    TrendPoint {
        value: of(&column.values),
        sigma: of(&column.sigmas),
        repeat_sigma: of(&column.repeat_sigmas),
        measured: of(&column.measured),
    }
}

impl Store {
    /// What trends can be shown of a plant: indicators, tags and then quantities, as the last of its balances lists them,
    /// and then what only earlier ones list.
    ///
    /// # Errors
    /// The database fails.
    pub async fn series(&self, plant: &str) -> Result<Vec<Series>, StoreError> {
        const LAYOUTS: &str = "SELECT text FROM layouts WHERE plant = $1 ORDER BY created_at DESC";
        let layouts: Vec<String> = sqlx::query_scalar(LAYOUTS).bind(plant).fetch_all(&self.readers).await?;
        let mut all: Vec<Series> = Vec::new();
        let mut names = std::collections::HashSet::new();
        for layout in layouts {
            let layout: Layout = of_json("a layout", &layout)?;
            all.extend(series_of(layout).filter(|series| names.insert(series.name.clone())));
        }
        all.sort_by_key(|series| series.kind);
        Ok(all)
    }

    /// One series of a plant over a stretch of time.
    ///
    /// # Errors
    /// The database fails, or what it has can't be read.
    pub async fn trend(
        &self,
        plant: &str,
        series: &str,
        measure: &str,
        from: Option<Timestamp>,
        to: Option<Timestamp>,
    ) -> Result<TrendData, StoreError> {
        const BLOCKS: &str = "
            SELECT day_columns.block, day_marks.marks
            FROM day_columns
            JOIN day_marks ON day_marks.plant = day_columns.plant AND day_marks.day = day_columns.day
            WHERE day_columns.plant = $1 AND series = $2 AND measure = $3
                AND day_columns.day >= $4 AND day_columns.day <= $5
            ORDER BY day_columns.day";
        let (from, to) = (from.map_or(i64::MIN, millisecond), to.map_or(i64::MAX, millisecond));
        let blocks: Vec<(Vec<u8>, Vec<u8>)> = sqlx::query_as(BLOCKS)
            .bind(plant)
            .bind(series)
            .bind(measure)
            .bind(Day::of(from))
            .bind(Day::of(to))
            .fetch_all(&self.readers)
            .await?;
        let mut trend = TrendData::default();
        for (block, marks) in blocks {
            let marks = DayMarks::unpack(&marks)?;
            let column = DayColumn::unpack(&block, marks.from.len())?;
            for place in (0..marks.from.len()).filter(|place| (from..to).contains(&marks.from[*place])) {
                let mark = marks.mark(place);
                if trend.marks.last().is_none_or(|(_, last)| last != mark) {
                    trend.marks.push((trend.from.len(), mark.clone()));
                }
                trend.from.push(marks.from[place]);
                trend.to.push(marks.to[place]);
                trend.points.push(point(&column, place));
            }
        }
        Ok(trend)
    }
}

/// Everything that balances of a layout have a point of.
fn series_of(layout: Layout) -> impl Iterator<Item = Series> {
    let of = |kind| {
        move |name: crate::record::Name| Series {
            name: name.name,
            kind,
            unit: name.unit,
            measure: name.measure,
            description: name.description,
        }
    };
    let indicators = layout.indicators.into_iter().map(of(SeriesKind::Indicator));
    let tags = layout.tags.into_iter().map(of(SeriesKind::Tag));
    indicators.chain(tags).chain(layout.quantities.into_iter().map(of(SeriesKind::Quantity)))
}
