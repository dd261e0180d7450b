//! A real Chromium, driven over the W3C's protocol for that, on pages of a real service.

use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::sync::Arc;
use std::time::Duration;

use fantoccini::elements::Element;
use fantoccini::{Client, ClientBuilder, Locator};
use hyper_util::client::legacy::connect::HttpConnector;
use meterwright::http::{Reach, serve};
use meterwright::work::Work;
use serde_json::json;
use tempfile::TempDir;
use tokio::net::TcpListener;
use tokio::sync::oneshot;

/// Longer than this nothing on the page takes.
const PATIENCE: Duration = Duration::from_mins(1);
/// What Debian's Chromium needs in a container, and what keeps it from looking for other machines.
const ARGUMENTS: [&str; 9] = [
    "--headless=new",
    "--no-sandbox",
    "--disable-dev-shm-usage",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
];

/// A service, a browser on its page, and the driver between.
pub(crate) struct Browser {
    pub(crate) page: Client,
    pub(crate) work: Arc<Work>,
    base: String,
    driver: Child,
    stop: Option<oneshot::Sender<()>>,
    _folder: TempDir,
}

impl Browser {
    /// A service with nothing in it, and a browser as wide as this on its page.
    pub(crate) async fn open(width: u32) -> Self {
        let folder = TempDir::new().unwrap();
        let work = Work::open(folder.path()).await.unwrap();
        let listener = TcpListener::bind("127.0.0.1:0").await.unwrap();
        let base = format!("http://{}", listener.local_addr().unwrap());
        let (stop, stopped) = oneshot::channel::<()>();
        let ended = work.clone();
        let shutdown = async move {
            let _ = stopped.await;
            ended.stop();
        };
        tokio::spawn(work.clone().run());
        tokio::spawn(serve(listener, work.clone(), Reach::Loopback, shutdown));
        let (driver, port) = driver();
        let mut arguments: Vec<String> = ARGUMENTS.iter().map(ToString::to_string).collect();
        arguments.push(format!("--window-size={width},900"));
        let mut options = json!({ "args": arguments, "binary": "/usr/bin/chromium" });
        if width < 500 {
            // A window can't be as narrow as a telephone; an emulated one can.
            options["mobileEmulation"] =
                json!({ "deviceMetrics": { "width": width, "height": 844, "pixelRatio": 1.0 } });
        }
        let wanted = json!({ "goog:chromeOptions": options });
        let page = ClientBuilder::new(HttpConnector::new())
            .capabilities(wanted.as_object().unwrap().clone())
            .connect(&format!("http://127.0.0.1:{port}"))
            .await
            .unwrap();
        page.goto(&base).await.unwrap();
        Self { page, work, base, driver, stop: Some(stop), _folder: folder }
    }

    /// Goes to an address of the page.
    pub(crate) async fn go(&self, address: &str) {
        self.page.goto(&format!("{}{address}", self.base)).await.unwrap();
    }

    /// The element of a selector, as soon as it is there.
    pub(crate) async fn wait(&self, selector: &str) -> Element {
        let waiting = self.page.wait().at_most(PATIENCE).for_element(Locator::Css(selector));
        waiting.await.unwrap_or_else(|error| panic!("{selector}: {error}"))
    }

    /// Waits until an expression of the page's own is true.
    pub(crate) async fn until(&self, expression: &str) {
        let script = format!("return Boolean({expression})");
        let met = tokio::time::timeout(PATIENCE, async {
            while self.page.execute(&script, Vec::new()).await.unwrap() != json!(true) {
                tokio::task::yield_now().await;
            }
        });
        assert!(met.await.is_ok(), "{expression}\n{}", self.text("body").await);
    }

    /// What a person reads in an element.
    pub(crate) async fn text(&self, selector: &str) -> String {
        self.page.find(Locator::Css(selector)).await.unwrap().text().await.unwrap()
    }

    /// Drops a file on the page as a mouse does.
    pub(crate) async fn drop_file(&self, selector: &str, name: &str, text: &str) {
        const DROP: &str = "
            const [selector, name, text] = arguments;
            const files = new DataTransfer();
            files.items.add(new File([text], name, { type: 'text/csv' }));
            for (const kind of ['dragenter', 'dragover', 'drop']) {
                document.querySelector(selector).dispatchEvent(
                    new DragEvent(kind, { dataTransfer: files, bubbles: true, cancelable: true }));
            }";
        self.page.execute(DROP, vec![json!(selector), json!(name), json!(text)]).await.unwrap();
    }

    /// Keeps a picture of the whole page beside the other results of the tests.
    pub(crate) async fn picture(&self, name: &str) {
        let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("pictures");
        std::fs::create_dir_all(&folder).unwrap();
        let picture = self.page.screenshot().await.unwrap();
        std::fs::write(folder.join(format!("{name}.png")), picture).unwrap();
    }

    pub(crate) async fn close(mut self) {
        self.page.clone().close().await.unwrap();
        drop(self.stop.take());
        self.driver.kill().unwrap();
        self.driver.wait().unwrap();
    }
}

/// Starts the driver on a free port.
fn driver() -> (Child, u16) {
    let mut driver = Command::new(installed())
        .arg("--port=0")
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    let mut lines = BufReader::new(driver.stdout.take().unwrap()).lines().map_while(Result::ok);
    let port =
        lines.find_map(|line| line.split_once("successfully on port ")?.1.trim_end_matches('.').parse().ok());
    // It goes on writing, and must not find its reader gone.
    std::thread::spawn(move || lines.for_each(drop));
    (driver, port.unwrap())
}

/// The driver of Debian's Chromium, which is installed if it is missing.
fn installed() -> PathBuf {
    let driver = PathBuf::from("/usr/bin/chromedriver");
    if !driver.exists() || !Path::new("/usr/bin/chromium").exists() {
        for arguments in
            [&["update"][..], &["install", "--yes", "--no-install-recommends", "chromium", "chromium-driver"]]
        {
            let installed = Command::new("apt-get").args(arguments).stdout(Stdio::null()).status();
            assert!(
                installed.is_ok_and(|status| status.success()),
                "install Debian's chromium and chromium-driver"
            );
        }
    }
    driver
}
