//! Tables of what the search and each published method find on the published networks, beside the published figures.

use meterwright_engine::METHODS;

use super::gross_errors::figures::{
    COMPUTED_TRIALS, Figures, ONE_BIAS, ONE_LEAK, PUBLISHED_TRIALS, SEVERAL, SEVERAL_TRIALS, STEAM_LIMIT,
    Several,
};
use super::gross_errors::network::{BIASES, LEAKS, Network, Settings};
use super::gross_errors::trials::{Judge, Tally, biases, limit, method, one_bias, one_leak};

/// Wrong names a trial where nothing is wrong: what all methods are held to.
const AVTI: f64 = 0.1;
const SEED: u128 = 20_261_201;

/// One bias at a time on all networks.
pub(crate) fn one_bias_each(trials: u32) {
    println!(
        "\nOne bias of 2 to 7 sigmas, each stream in turn; overall power and wrong names a trial, of what is named first"
    );
    println!(
        "(published: E. Cordeiro do Valle et al. 2018, {PUBLISHED_TRIALS} trials; computed: independently, {COMPUTED_TRIALS})"
    );
    println!(
        "network   measurement test         published  computed   global test  published  computed   search"
    );
    for row in ONE_BIAS {
        let network = Network::load(row.network, BIASES);
        let test = Judge::Method(method("serial_elimination"), row.limit);
        let (tally, global) = one_bias(&network, test, row.global_limit, trials, SEED);
        let (search, _) = one_bias(&network, Judge::Search(AVTI), row.global_limit, trials, SEED);
        println!(
            "{:<8}  {:>8.4} ± {:.4}  {:.4}  {:>9.4}  {:>8.4}  {:>12.4}  {:>9.4}  {:>8.4}   {:.4}  {:.4}",
            row.network,
            tally.power().0,
            tally.power().1,
            tally.avti().0,
            row.published[0],
            row.computed[0],
            global,
            row.published[1],
            row.computed[1],
            search.power().0,
            search.avti().0
        );
    }
}

/// One leak at a time on the steam-metering network.
pub(crate) fn one_leak_each(trials: u32) {
    println!("\nOne leak of 2 to 7 % of a node's total flow, steam-metering network; overall power");
    println!("(published: E. Cordeiro do Valle et al. 2018)");
    println!("node  nodal test       published   likelihood ratio  published   search");
    let network = Network::load("net_15", LEAKS);
    let judges = ["nodal_test", "likelihood_ratio"]
        .map(|name| Judge::Method(method(name), limit(&network, method(name), AVTI, 1, trials)));
    for (node, published) in ONE_LEAK.iter().enumerate() {
        let [nodal, ratio] = judges.map(|judge| one_leak(&network, judge, node, trials, SEED).power());
        let search = one_leak(&network, Judge::Search(AVTI), node, trials, SEED).power();
        println!(
            "{:>4}  {:.3} ± {:.3}        {:.3}      {:.3} ± {:.3}      {:.3}     {:.3}",
            node + 1,
            nodal.0,
            nodal.1,
            published[0],
            ratio.0,
            ratio.1,
            published[1],
            search.0
        );
    }
}

/// Several biases at once on the steam-metering network.
pub(crate) fn several(trials: u32) {
    println!(
        "\nSeveral biases at once, steam-metering network (protocol of Serth and Heenan 1986, Narasimhan and Mah 1987);"
    );
    println!(
        "published: computed independently, {SEVERAL_TRIALS} trials a row, 300 for posterior inclusion, 60,000 for the ceiling"
    );
    let network = Network::load("net_15", BIASES);
    let mut judges: Vec<(&str, f64, Judge<'_>)> = Vec::new();
    for method in METHODS.iter().filter(|method| method.name != "nodal_test") {
        let published = ["serial_elimination", "likelihood_ratio"].contains(&method.name);
        let limit = if published { STEAM_LIMIT } else { limit(&network, method, AVTI, usize::MAX, trials) };
        judges.push((method.name, limit, Judge::Method(method, limit)));
    }
    judges.push(("search", AVTI, Judge::Search(AVTI)));
    println!("\nnothing wrong");
    for (name, level, judge) in &judges {
        let none = biases(&network, *judge, SEVERAL[0].size, 0, trials, SEED + 1).avti();
        println!("  {name:<28} level {level:.4}  AVTI {:.3} ± {:.3}", none.0, none.1);
    }
    for several in &SEVERAL {
        let known =
            Network::load("net_15", Settings { fault_rate: 0.08, bias_size: several.bias_size, ..BIASES });
        for (place, row) in several.rows.iter().enumerate() {
            println!(
                "\n{}, {} at once                OP            AVTI   selectivity  exact",
                several.name, row.errors
            );
            let run = |network: &Network, judge: Judge<'_>| {
                biases(network, judge, several.size, row.errors, trials, SEED + 2 + place as u128)
            };
            for (name, _, judge) in &judges {
                shown(name, &run(&network, *judge));
            }
            shown("search, prior of the protocol", &run(&known, Judge::Search(AVTI)));
            stated("published serial elimination", row.serial_elimination);
            stated("published likelihood ratio", row.likelihood_ratio);
            stated("published best subset", row.best_subset);
            more(several, row.errors);
        }
    }
}

/// What else is published of a row.
fn more(several: &Several, errors: usize) {
    let place = [2, 3, 5].iter().position(|count| *count == errors);
    if let (Some(rows), Some(place)) = (&several.inclusion, place) {
        stated("published posterior inclusion", rows[place]);
    }
    if errors == 1 {
        println!(
            "  {:<32} {:.3}          {:.3}",
            "ceiling: exact posterior", several.ceiling[0], several.ceiling[1]
        );
    }
}

fn shown(name: &str, tally: &Tally) {
    println!(
        "  {name:<32} {:.3} ± {:.3}  {:.3}  {:.3}        {:.3}",
        tally.power().0,
        tally.power().1,
        tally.avti().0,
        tally.selectivity(),
        tally.exact().0
    );
}

fn stated(name: &str, [power, avti, selectivity, exact]: Figures) {
    println!("  {name:<32} {power:.3}          {avti:.3}  {selectivity:.3}        {exact:.3}");
}
