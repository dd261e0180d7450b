//! Published figures, and figures computed independently of this project by the published protocols.

use super::network::ErrorSize;

/// E. Cordeiro do Valle et al., Computers & Chemical Engineering 111 (2018) 134-148: one bias of 2 to 7 sigmas, 2,500
/// trials. The limit is that at which 10 % of trials without an error have a test beyond it.
pub(crate) struct OneBias {
    pub(crate) network: &'static str,
    /// Limit of the measurement test.
    pub(crate) limit: f64,
    /// The 90 % point of the chi-square distribution with the network's degrees of freedom.
    pub(crate) global_limit: f64,
    /// Mean overall power of the measurement test and power of the global test, as published.
    pub(crate) published: [f64; 2],
    /// The same from 20,000 trials of our own protocol in another program.
    pub(crate) computed: [f64; 2],
}

/// Trials behind the published figures.
pub(crate) const PUBLISHED_TRIALS: f64 = 2500.0;
/// Trials behind the computed ones.
pub(crate) const COMPUTED_TRIALS: f64 = 20_000.0;

const fn one_bias(
    network: &'static str,
    limit: f64,
    global_limit: f64,
    published: [f64; 2],
    computed: [f64; 2],
) -> OneBias {
    OneBias { network, limit, global_limit, published, computed }
}

pub(crate) const ONE_BIAS: &[OneBias] = &[
    one_bias("net_1", 1.6372, 2.7055, [0.0000, 0.6445], [0.0000, 0.6367]),
    one_bias("net_2", 2.1848, 6.2514, [0.2525, 0.7089], [0.2554, 0.7081]),
    one_bias("net_4", 2.3369, 7.7794, [0.7658, 0.8199], [0.7643, 0.8131]),
    one_bias("net_6", 2.3697, 7.7794, [0.6850, 0.7689], [0.6926, 0.7744]),
    one_bias("net_12", 2.4976, 10.6446, [0.4763, 0.6376], [0.4744, 0.6392]),
    one_bias("net_15", 2.8043, 17.2750, [0.3690, 0.4620], [0.3649, 0.4598]),
];

/// The same source: overall power of the nodal test and of the generalised likelihood ratio for one leak at each node of
/// the steam-metering network.
pub(crate) const ONE_LEAK: [[f64; 2]; 11] = [
    [0.489, 0.605],
    [0.581, 0.876],
    [0.476, 0.627],
    [0.548, 0.714],
    [0.809, 0.938],
    [0.497, 0.732],
    [0.606, 0.698],
    [0.630, 0.682],
    [0.580, 0.688],
    [0.519, 0.612],
    [0.612, 0.849],
];

/// Limit of the measurement tests on the steam-metering network.
pub(crate) const STEAM_LIMIT: f64 = 2.8043;
/// Trials behind each row of [`SEVERAL`].
pub(crate) const SEVERAL_TRIALS: f64 = 4000.0;

/// Several biases of one size.
pub(crate) struct Several {
    pub(crate) name: &'static str,
    pub(crate) size: ErrorSize,
    /// Prior standard deviation in sigmas that is the size's root mean square.
    pub(crate) bias_size: f64,
    /// For 1, 2, 3, 5 and 7 errors.
    pub(crate) rows: [Row; 5],
    /// The exact posterior that knows the law of the sizes, one error: overall power and wrong names a trial.
    pub(crate) ceiling: [f64; 2],
    /// Posterior inclusion probabilities by enumeration of all sets up to five, 300 trials; for 2, 3 and 5 errors.
    pub(crate) inclusion: Option<[Figures; 3]>,
}

/// Overall power, average number of type I errors, selectivity, share of exact sets.
pub(crate) type Figures = [f64; 4];

/// Figures of three strategies for a number of errors.
pub(crate) struct Row {
    pub(crate) errors: usize,
    pub(crate) serial_elimination: Figures,
    pub(crate) likelihood_ratio: Figures,
    pub(crate) best_subset: Figures,
}

const fn row(
    errors: usize,
    serial_elimination: Figures,
    likelihood_ratio: Figures,
    best_subset: Figures,
) -> Row {
    Row { errors, serial_elimination, likelihood_ratio, best_subset }
}

/// Biases at random places of the steam-metering network (R. W. Serth and W. A. Heenan, AIChE J. 32 (1986) 733-742),
/// protocol of theirs and of S. Narasimhan and R. S. H. Mah, AIChE J. 33 (1987) 1514-1521, from memory. Figures computed
/// independently of this project, 4,000 trials a row; limits such that 0.1 are named a trial where nothing is wrong
/// (J. Rosenberg, R. S. H. Mah and C. Iordache, Ind. Eng. Chem. Res. 26 (1987) 555-564).
#[allow(clippy::approx_constant, reason = "a power of 0.318 has nothing to do with pi")]
pub(crate) const SEVERAL: [Several; 3] = [
    Several {
        name: "10-100 % of flow",
        size: ErrorSize::OfFlow(0.1, 1.0),
        bias_size: 24.32,
        rows: [
            row(1, [0.696, 0.118, 0.855, 0.640], [0.696, 0.111, 0.862, 0.647], [0.705, 0.122, 0.852, 0.641]),
            row(2, [0.654, 0.231, 0.850, 0.381], [0.659, 0.235, 0.849, 0.378], [0.660, 0.210, 0.863, 0.396]),
            row(3, [0.599, 0.403, 0.817, 0.191], [0.604, 0.421, 0.811, 0.182], [0.624, 0.338, 0.847, 0.209]),
            row(5, [0.525, 0.874, 0.750, 0.021], [0.539, 0.985, 0.732, 0.019], [0.539, 0.755, 0.781, 0.035]),
            row(7, [0.454, 1.476, 0.683, 0.001], [0.476, 1.680, 0.665, 0.001], [0.457, 1.282, 0.714, 0.001]),
        ],
        ceiling: [0.721, 0.050],
        inclusion: Some([
            [0.690, 0.187, 0.881, 0.373],
            [0.699, 0.270, 0.886, 0.260],
            [0.645, 0.613, 0.840, 0.047],
        ]),
    },
    Several {
        name: "5-15 sigmas",
        size: ErrorSize::Sigmas(5.0, 15.0),
        bias_size: 10.4,
        rows: [
            row(1, [0.600, 0.129, 0.823, 0.552], [0.599, 0.123, 0.830, 0.557], [0.613, 0.133, 0.822, 0.557]),
            row(2, [0.561, 0.232, 0.829, 0.281], [0.563, 0.222, 0.836, 0.285], [0.561, 0.223, 0.834, 0.285]),
            row(3, [0.510, 0.382, 0.800, 0.113], [0.512, 0.368, 0.807, 0.117], [0.522, 0.344, 0.820, 0.123]),
            row(5, [0.439, 0.832, 0.725, 0.009], [0.444, 0.802, 0.735, 0.010], [0.444, 0.747, 0.748, 0.011]),
            row(7, [0.378, 1.309, 0.669, 0.000], [0.386, 1.284, 0.678, 0.000], [0.371, 1.207, 0.683, 0.000]),
        ],
        ceiling: [0.634, 0.059],
        inclusion: Some([
            [0.612, 0.123, 0.908, 0.307],
            [0.600, 0.297, 0.859, 0.170],
            [0.552, 0.473, 0.854, 0.020],
        ]),
    },
    Several {
        name: "2-7 sigmas",
        size: ErrorSize::Sigmas(2.0, 7.0),
        bias_size: 4.73,
        rows: [
            row(1, [0.363, 0.146, 0.713, 0.335], [0.363, 0.142, 0.718, 0.338], [0.364, 0.159, 0.696, 0.334]),
            row(2, [0.335, 0.225, 0.749, 0.099], [0.335, 0.217, 0.755, 0.100], [0.337, 0.233, 0.744, 0.103]),
            row(3, [0.317, 0.311, 0.753, 0.023], [0.318, 0.292, 0.766, 0.022], [0.316, 0.339, 0.737, 0.024]),
            row(5, [0.279, 0.561, 0.713, 0.001], [0.280, 0.519, 0.729, 0.000], [0.274, 0.588, 0.700, 0.000]),
            row(7, [0.248, 0.782, 0.689, 0.000], [0.249, 0.726, 0.706, 0.000], [0.240, 0.860, 0.661, 0.000]),
        ],
        ceiling: [0.394, 0.091],
        inclusion: None,
    },
];
