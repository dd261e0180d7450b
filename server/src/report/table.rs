//! Plain text tables and paragraphs of a limited width.

use std::borrow::Cow;

/// Width of everything that people read, in characters.
pub(super) const WIDTH: usize = 100;

/// One column of a table.
pub(super) struct Column {
    /// Its heading.
    pub(super) heading: Cow<'static, str>,
    /// Whether its cells end at one line, as numbers do.
    pub(super) is_number: bool,
    /// Columns of the largest rank are left out first where the table is too wide; those of rank 0 never are.
    pub(super) rank: u8,
    /// One a row.
    pub(super) cells: Vec<String>,
}

impl Column {
    pub(super) fn words(heading: impl Into<Cow<'static, str>>, cells: Vec<String>) -> Self {
        Self { heading: heading.into(), is_number: false, rank: 0, cells }
    }

    pub(super) fn numbers(heading: impl Into<Cow<'static, str>>, cells: Vec<String>) -> Self {
        Self { heading: heading.into(), is_number: true, rank: 0, cells }
    }

    pub(super) fn of_rank(self, rank: u8) -> Self {
        Self { rank, ..self }
    }

    fn width(&self) -> usize {
        self.cells.iter().map(|cell| length(cell)).chain([length(&self.heading)]).max().unwrap_or(0)
    }
}

/// The columns side by side under their headings, two spaces between, as many as fit; where even the columns that are never
/// left out are too wide, the last cell of a row stands below it. First the headings, then one text a row.
pub(super) fn table(mut columns: Vec<Column>) -> Vec<String> {
    while columns.iter().map(|column| column.width() + 2).sum::<usize>() > WIDTH + 2 {
        match columns.iter().map(|column| column.rank).max() {
            Some(rank) if rank > 0 => columns.retain(|column| column.rank != rank),
            _ => break,
        }
    }
    let widths: Vec<usize> = columns.iter().map(Column::width).collect();
    let rows = columns.iter().map(|column| column.cells.len()).max().unwrap_or(0);
    let heading = columns.iter().map(|column| &*column.heading);
    let mut lines = vec![line(&columns, &widths, heading)];
    for row in 0..rows {
        let cells = columns.iter().map(|column| column.cells.get(row).map_or("", String::as_str));
        lines.push(line(&columns, &widths, cells));
    }
    lines
}

fn line<'c>(columns: &[Column], widths: &[usize], cells: impl Iterator<Item = &'c str>) -> String {
    let mut line = String::with_capacity(WIDTH);
    for (place, ((column, width), cell)) in columns.iter().zip(widths).zip(cells).enumerate() {
        let gap = " ".repeat(width.saturating_sub(length(cell)));
        if place + 1 == columns.len() && length(&line) + length(cell) > WIDTH {
            line.truncate(line.trim_end().len());
            line += "\n      ";
        }
        if column.is_number {
            line += &gap;
        }
        line += cell;
        if !column.is_number {
            line += &gap;
        }
        line += "  ";
    }
    line.trim_end().to_owned() + "\n"
}

/// A paragraph broken between words; every line but the first is indented.
pub(super) fn wrapped(text: &str, indent: &str) -> String {
    let mut lines = String::new();
    let mut line = String::new();
    for word in text.split_whitespace() {
        if !line.trim().is_empty() && length(&line) + 1 + length(word) > WIDTH {
            lines += &line;
            lines.push('\n');
            line = format!("{indent}{word}");
        } else {
            if !line.is_empty() {
                line.push(' ');
            }
            line += word;
        }
    }
    lines + &line + "\n"
}

fn length(text: &str) -> usize {
    text.chars().count()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn column(heading: &'static str, cell: &str) -> Column {
        Column::words(heading, vec![cell.to_owned()])
    }

    #[test]
    fn columns_that_do_not_fit_are_left_out_from_the_least_important() {
        let wide = "x".repeat(60);
        let columns = vec![column("A", "1"), column("B", &wide).of_rank(2), column("C", &wide).of_rank(1)];
        assert_eq!(table(columns).concat(), format!("A  C\n1  {wide}\n"));
    }

    #[test]
    fn a_last_cell_that_does_not_fit_stands_below() {
        let columns = vec![column("A", &"x".repeat(90)), column("B", "0123456789")];
        let expected = format!("A{}  B\n{}\n      0123456789\n", " ".repeat(89), "x".repeat(90));
        assert_eq!(table(columns).concat(), expected);
    }

    #[test]
    fn paragraphs_stay_within_the_width() {
        let text = "word ".repeat(60);
        let lines = wrapped(&text, "  ");
        assert!(lines.lines().all(|line| line.len() <= WIDTH));
        assert!(lines.lines().skip(1).all(|line| line.starts_with("  word")));
        assert_eq!(lines.split_whitespace().count(), 60);
    }
}
