//! Seeded problems with the shape of a plant: streams with mass flow, pressure, temperature and enthalpy, a property
//! equation for each, mass and energy balances of equipment, and headers that join units.

/// The generator splitmix64 (Steele, Lea and Flood, OOPSLA 2014).
pub(super) struct Random(u64);

impl Random {
    pub(super) fn new(seed: u64) -> Self {
        Self(seed)
    }

    pub(super) fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Uniform between the two.
    pub(super) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * (self.bits() >> 11) as f64 / (1u64 << 53) as f64
    }

    /// One of the first whole numbers.
    pub(super) fn below(&mut self, count: usize) -> usize {
        (self.bits() % count as u64) as usize
    }

    /// Whether something of this probability happens.
    pub(super) fn chance(&mut self, probability: f64) -> bool {
        self.between(0.0, 1.0) < probability
    }
}

/// Equations as lists of (variable, coefficient), and a weight for each variable: `None` is free.
#[derive(Clone, Default)]
pub(super) struct Plant {
    pub(super) rows: Vec<Vec<(u32, f64)>>,
    pub(super) weights: Vec<Option<f64>>,
}

pub(super) struct Shape {
    pub(super) units: usize,
    pub(super) streams: usize,
    pub(super) equipment: usize,
    /// The share of variables that is measured.
    pub(super) measured: f64,
    /// Decades over which weights are spread, around 1e4.
    pub(super) decades: f64,
}

impl Plant {
    pub(super) fn new(seed: u64, shape: &Shape) -> Self {
        let mut random = Random::new(seed);
        let mut plant = Self::default();
        for unit in 0..shape.units {
            plant.unit(&mut random, unit * shape.streams, shape);
        }
        let count = shape.units * shape.streams * 4;
        if shape.units > 1 {
            plant.header(&mut random, shape);
        }
        for variable in 0..count {
            let exponent = 4.0 + shape.decades * random.between(-0.5, 0.5);
            // Flows are measured seldom, pressures and temperatures often, enthalpies never.
            let share = shape.measured * [0.7, 1.8, 1.5, 0.0][variable % 4];
            let weight = random.chance(share).then(|| 10f64.powf(exponent));
            plant.weights.push(weight);
        }
        plant
    }

    /// A chain of equipment with recycles and branches.
    fn unit(&mut self, random: &mut Random, first: usize, shape: &Shape) {
        let state: Vec<(f64, f64)> =
            (0..shape.streams).map(|_| (random.between(0.05, 1.5), random.between(0.2, 3.5))).collect();
        let mut mass = vec![Vec::new(); shape.equipment];
        let mut energy = vec![Vec::new(); shape.equipment];
        for (stream, (flow, enthalpy)) in state.iter().enumerate() {
            let variable = 4 * (first + stream) as u32;
            let from = stream % shape.equipment;
            let to = if random.chance(0.75) { from + 1 } else { from + 1 + random.below(5) };
            for (place, sign) in [(from, -1.0), (to, 1.0)] {
                // The last places are the surroundings.
                if place < shape.equipment {
                    mass[place].push((variable, sign));
                    energy[place].push((variable, sign * enthalpy));
                    energy[place].push((variable + 3, sign * flow));
                }
            }
            let (by_pressure, by_temperature) = (random.between(-0.2, 0.02), random.between(0.2, 0.6));
            self.rows.push(vec![
                (variable + 1, by_pressure),
                (variable + 2, -by_temperature),
                (variable + 3, 1.0),
            ]);
        }
        self.rows.extend(mass.into_iter().chain(energy).filter(|row| {
            row.iter().any(|(variable, _)| *variable != row[0].0 && *variable != row[0].0 + 3)
        }));
    }

    /// Two streams of every unit meet in a header whose outlets share pressure and enthalpy.
    fn header(&mut self, random: &mut Random, shape: &Shape) {
        let (mut mass, mut energy) = (Vec::new(), Vec::new());
        for unit in 0..shape.units {
            let inlet = 4 * (unit * shape.streams + shape.streams - 1) as u32;
            let outlet = inlet - 4;
            for (stream, sign) in [(inlet, 1.0), (outlet, -1.0)] {
                mass.push((stream, sign));
                energy.push((stream, sign * random.between(2.5, 3.5)));
                energy.push((stream + 3, sign * random.between(0.2, 1.5)));
            }
            if unit > 0 {
                let before = outlet - 4 * shape.streams as u32;
                self.rows.push(vec![(before + 1, 1.0), (outlet + 1, -1.0)]);
                self.rows.push(vec![(before + 3, 1.0), (outlet + 3, -1.0)]);
            }
        }
        self.rows.push(mass);
        self.rows.push(energy);
    }
}
