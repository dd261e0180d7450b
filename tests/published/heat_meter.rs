//! Real input: one district-heating meter over three years. M. Schaffer, T. Tvedebrink, A. Marszal-Pomianowska,
//! Scientific Data 9 (2022) 420, doi 10.1038/s41597-022-01502-3; the file is not part of the project and is read where it
//! lies beside it.
//!
//! Which pipe does the volume meter sit on? Weekly heat, volume flow and flow-weighted temperatures go through two plant
//! files that differ in nothing else. One degree of freedom can say that something is wrong, not which meter.

use crate::support::{balance, compiled, path, readings};

/// Hours of a week, and the rows of one.
const WEEK: usize = 168;

/// Registers at one hour: heat (kWh), volume (m3), volume times inlet and return temperature (m3 degC).
type Registers = [f64; 4];

fn registers() -> Option<Vec<Registers>> {
    let file = path("../shared/data/heat_meter.csv");
    let Ok(text) = std::fs::read_to_string(&file) else {
        assert!(std::env::var_os("CI").is_none(), "the open data must lie at {}", file.display());
        println!("the open data does not lie at {}: nothing was checked", file.display());
        return None;
    };
    let mut lines = text.lines();
    let head: Vec<&str> = lines.next().unwrap().split(',').collect();
    let column =
        |word: &str| head.iter().position(|name| name.contains(word)).unwrap_or_else(|| panic!("{head:?}"));
    let columns = [column("energy_heat"), column("volume_flow"), column("inlet_flow"), column("back_flow")];
    let row = |line: &str| {
        let cells: Vec<&str> = line.split(',').collect();
        columns.map(|column| cells[column].parse().unwrap())
    };
    Some(lines.map(row).collect())
}

/// A heat user whose volume meter sits on the stream named. The heat balance's own standard uncertainty is 0.7 %; on top
/// comes the heat register's resolution, since it counts whole kilowatt hours: a step's width over the root of six for
/// the difference of two registers, 0.41 kWh in a week or 2.4 W, which matters in summer when a week takes 60 kWh.
fn plant(metered: &str) -> String {
    format!(
        r#"format = 1
[plant]
name = "One heat user"
[streams.supply]
fluid = "water"
to = "user.inlet"
phase = "liquid"
[streams.return]
fluid = "water"
from = "user.outlet"
phase = "liquid"
[equipment.user]
kind = "heat_user"
[given]
"supply.pressure" = "6 bar"
"return.pressure" = "6 bar"
[tags.heat]
reads = "user.duty"
unit = "kW"
accuracy = ["0.98 %", "4.8 W"]
[tags.volume]
reads = "{metered}.volume_flow"
unit = "m3/h"
sigma = "0.49 %"
[tags.hot]
reads = "supply.temperature"
unit = "degC"
sigma = "0.0001 K"
[tags.cold]
reads = "return.temperature"
unit = "degC"
sigma = "0.0001 K"
"#
    )
}

/// How many of the weeks pass the global test, and how many there are.
fn passing(metered: &str, registers: &[Registers]) -> (usize, usize) {
    let plant = compiled(&plant(metered));
    let weeks: Vec<(&Registers, &Registers)> = (0..registers.len() / WEEK)
        .map(|week| (&registers[week * WEEK], &registers[((week + 1) * WEEK).min(registers.len() - 1)]))
        .collect();
    let passes = weeks.iter().filter(|(first, last)| {
        let used: Vec<f64> = last.iter().zip(*first).map(|(last, first)| last - first).collect();
        let hours = WEEK as f64;
        let values = [
            ("heat", used[0] / hours),
            ("volume", used[1] / hours),
            ("hot", used[2] / used[1]),
            ("cold", used[3] / used[1]),
        ];
        let told = balance(&plant, &readings(&plant, &values));
        assert_eq!(told.freedom(), 1);
        told.balance.global_test.unwrap().passes
    });
    (passes.count(), weeks.len())
}

#[test]
fn the_balance_of_real_data_tells_on_which_pipe_the_meter_sits() {
    let Some(registers) = registers() else { return };
    let (inlet, weeks) = passing("supply", &registers);
    let (outlet, _) = passing("return", &registers);
    println!("{inlet} of {weeks} weeks pass with the volume meter at the inlet, {outlet} at the return");
    assert_eq!(weeks, 156);
    assert!(inlet as f64 >= 0.96 * weeks as f64, "{inlet} of {weeks} at the inlet");
    assert!((outlet as f64) < 0.5 * weeks as f64, "{outlet} of {weeks} at the return");
}
