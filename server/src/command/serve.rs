//! `meterwright serve`: the service on a listener, until it is told to stop.

use std::future::Future;
use std::io::{self, IsTerminal};
use std::net::SocketAddr;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use clap::Args;
use tokio::net::TcpListener;
use tokio::runtime;
use tracing_subscriber::EnvFilter;

use super::Status;
use super::input::say;
use crate::http::{Reach, serve};
use crate::work::Work;

/// Keep plants, logs and balances, and show them on a page
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The folder in which everything is kept; made if it isn't there
    #[arg(long, value_name = "DIR", default_value = "meterwright-data", env = "METERWRIGHT_DATA")]
    data: PathBuf,
    #[command(flatten)]
    listening: Listening,
}

/// Where the service listens.
#[derive(Args, Clone, Copy, Debug)]
pub(super) struct Listening {
    /// Address and port to listen on; port 0 takes a free one
    #[arg(long, value_name = "ADDR", default_value = "127.0.0.1:8717", env = "METERWRIGHT_LISTEN")]
    listen: SocketAddr,
    /// Let other machines in: there is no access control yet, whoever reaches the port may read and change everything
    #[arg(long)]
    allow_remote: bool,
}

pub(super) fn run(arguments: &Arguments) -> Status {
    listening(arguments.listening, &arguments.data, |_| std::future::ready(()))
}

/// Runs the service in a folder; `beside` is done meanwhile.
pub(super) fn listening<F: Future<Output = ()> + Send + 'static>(
    listening: Listening,
    data: &Path,
    beside: impl FnOnce(Arc<Work>) -> F,
) -> Status {
    if !listening.listen.ip().is_loopback() && !listening.allow_remote {
        say(format_args!(
            "{} can be reached from other machines, and there is no access control yet: listen on 127.0.0.1 and let a proxy \
             with access control in front of it, or say --allow-remote",
            listening.listen
        ));
        return Status::WrongUsage;
    }
    let filter = EnvFilter::try_from_default_env().unwrap_or_else(|_| EnvFilter::new("info"));
    // Where a test or another program has set one up already, that one stays.
    let _ = tracing_subscriber::fmt()
        .with_env_filter(filter)
        .with_writer(io::stderr)
        .with_ansi(io::stderr().is_terminal())
        .try_init();
    let runtime = match runtime::Builder::new_multi_thread().enable_all().build() {
        Ok(runtime) => runtime,
        Err(error) => {
            say(format_args!("the service can't begin: {error}"));
            return Status::WrongInput;
        }
    };
    runtime.block_on(async {
        match begun(listening, data, beside).await {
            Ok(()) => Status::Done,
            Err(error) => {
                say(error);
                Status::WrongInput
            }
        }
    })
}

async fn begun<F: Future<Output = ()> + Send + 'static>(
    listening: Listening,
    data: &Path,
    beside: impl FnOnce(Arc<Work>) -> F,
) -> Result<(), String> {
    let work = Work::open(data).await.map_err(|error| error.to_string())?;
    let in_use = |error| format!("{}: {error}; name another port by --listen", listening.listen);
    let listener = TcpListener::bind(listening.listen).await.map_err(in_use)?;
    let address = listener.local_addr().map_err(in_use)?;
    println!("Meterwright {} keeps its data in {}", env!("CARGO_PKG_VERSION"), data.display());
    println!("and answers at http://{address}/  (Ctrl-C stops it)");
    let queue = tokio::spawn(work.clone().run());
    tokio::spawn(beside(work.clone()));
    let reach = if listening.allow_remote { Reach::Remote } else { Reach::Loopback };
    let stopped = {
        let work = work.clone();
        async move {
            asked_to_stop().await;
            tracing::info!("stops: what is under way is finished");
            work.stop();
        }
    };
    let served = serve(listener, work.clone(), reach, stopped).await;
    let _ = queue.await;
    work.store.close().await;
    served.map_err(|error| format!("{address}: {error}"))
}

/// Done when somebody presses Ctrl-C or the system asks the program to end.
async fn asked_to_stop() {
    use tokio::signal::unix::{SignalKind, signal};
    let terminated = async {
        match signal(SignalKind::terminate()) {
            Ok(mut signal) => drop(signal.recv().await),
            Err(_) => std::future::pending().await,
        }
    };
    tokio::select! {
        _ = tokio::signal::ctrl_c() => {}
        () = terminated => {}
    }
}
