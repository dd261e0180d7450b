//! Water as its users see it.

mod common;
mod identities;
mod limits;
mod oracle;
mod release;
