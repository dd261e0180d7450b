//! The service from outside: logs as files, periods, and the program as people and scripts run it.

mod check_command;
mod command_line;
mod files;
mod log_faults;
mod log_forms;
mod period_means;
mod steady_periods;
#[cfg(target_os = "linux")]
mod streams;
mod times;
mod wrong_files;
