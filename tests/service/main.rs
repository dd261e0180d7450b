//! The service from outside: logs as files, periods, and the program as people and scripts run it.

mod files;
mod log_faults;
mod log_forms;
mod times;
