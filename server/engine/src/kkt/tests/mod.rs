//! Every answer of the sparse path beside a dense one that shares no code with it.

mod cases;
mod numbers;
mod oracle;
mod plant;
mod ranks;

use plant::Shape;

/// A small plant: 20 streams, 80 variables, about 40 equations.
const SMALL: Shape = Shape { units: 1, streams: 20, equipment: 12, measured: 0.55, decades: 3.0 };
/// The size of a reheat unit: 180 variables and about 95 equations.
const UNIT: Shape = Shape { units: 1, streams: 45, equipment: 25, measured: 0.45, decades: 3.0 };
/// Three small units on a header.
const JOINED: Shape = Shape { units: 3, streams: 16, equipment: 10, measured: 0.5, decades: 3.0 };
