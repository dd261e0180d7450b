//! The HTTP API on a real listener with a real SQLite file. One file a resource, as in the service; every answer is held
//! against the service's own description of itself.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test stops where what it needs can't be had")]

mod balances;
mod crash;
mod description;
mod guard;
mod logs;
mod plants;
mod program;
mod reconcile;
mod server;
mod trends;
