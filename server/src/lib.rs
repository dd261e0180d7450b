//! Meterwright's service: everything that touches the world. The balance itself lives in `meterwright-engine`.
