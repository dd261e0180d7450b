//! A real service on a free port with a real SQLite file, and a client that holds every answer against its description.

use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::sync::Mutex;
use std::thread::JoinHandle;

use meterwright::http::{Reach, serve};
use meterwright::work::Work;
use serde_json::{Value, json};
use tempfile::TempDir;
use tokio::net::TcpListener;
use tokio::runtime::Runtime;
use tokio::sync::oneshot;

pub(crate) const REHEAT_UNIT: &str = include_str!("../plants/reheat_unit.toml");
pub(crate) const REHEAT_LOG: &str = include_str!("../plants/reheat_unit.csv");

/// A service in this process.
pub(crate) struct Server {
    pub(crate) client: Client,
    stop: Option<oneshot::Sender<()>>,
    thread: Option<JoinHandle<()>>,
    /// Its folder, which is removed after it.
    _folder: Folder,
}

enum Folder {
    Own(TempDir),
    Given(PathBuf),
}

impl Server {
    /// A service with nothing in it.
    pub(crate) fn start() -> Self {
        Self::begin(Folder::Own(TempDir::new().unwrap()), Reach::Loopback)
    }

    /// A service in a folder that another had.
    pub(crate) fn start_in(folder: &Path) -> Self {
        Self::begin(Folder::Given(folder.to_owned()), Reach::Loopback)
    }

    fn begin(folder: Folder, reach: Reach) -> Self {
        let runtime = Runtime::new().unwrap();
        let work = runtime.block_on(Work::open(folder.path())).unwrap();
        let listener = runtime.block_on(TcpListener::bind("127.0.0.1:0")).unwrap();
        let address = listener.local_addr().unwrap();
        let (stop, stopped) = oneshot::channel();
        let shared = work;
        let thread = std::thread::spawn(move || {
            runtime.block_on(async {
                let queue = tokio::spawn(shared.clone().run());
                let ended = shared.clone();
                let shutdown = async move {
                    let _ = stopped.await;
                    ended.stop();
                };
                serve(listener, shared.clone(), reach, shutdown).await.unwrap();
                queue.await.unwrap();
                shared.store.close().await;
            });
        });
        let client = Client::new(format!("http://{address}"));
        Self { client, stop: Some(stop), thread: Some(thread), _folder: folder }
    }
}

impl Folder {
    fn path(&self) -> &Path {
        match self {
            Self::Own(folder) => folder.path(),
            Self::Given(folder) => folder,
        }
    }
}

impl Drop for Server {
    fn drop(&mut self) {
        drop(self.stop.take());
        if let Some(thread) = self.thread.take() {
            thread.join().unwrap();
        }
    }
}

/// Asks a service, and holds what it answers against its own description.
pub(crate) struct Client {
    pub(crate) base: String,
    agent: ureq::Agent,
    description: Value,
    /// Every path and method that was asked for, as the description names them.
    pub(crate) asked: Mutex<Vec<(String, String)>>,
}

/// An answer.
pub(crate) struct Answer {
    pub(crate) status: u16,
    pub(crate) kind: String,
    pub(crate) headers: ureq::http::HeaderMap,
    pub(crate) text: String,
}

impl Answer {
    pub(crate) fn json(&self) -> Value {
        serde_json::from_str(&self.text).unwrap_or_else(|error| panic!("{error}: {}", self.text))
    }
}

impl Client {
    pub(crate) fn new(base: String) -> Self {
        let agent = ureq::Agent::config_builder().http_status_as_error(false).build().into();
        let mut client = Self { base, agent, description: Value::Null, asked: Mutex::default() };
        client.description = client.send("GET", "/api/v1/openapi.json", &[], Vec::new()).json();
        client
    }

    pub(crate) fn description(&self) -> &Value {
        &self.description
    }

    /// Asks, whatever the description says.
    pub(crate) fn send(&self, method: &str, path: &str, headers: &[(&str, &str)], body: Vec<u8>) -> Answer {
        let mut request = ureq::http::Request::builder().method(method).uri(format!("{}{path}", self.base));
        for (name, value) in headers {
            request = request.header(*name, *value);
        }
        let mut response = self.agent.run(request.body(body).unwrap()).unwrap();
        let kind =
            response.headers().get("content-type").map_or("", |kind| kind.to_str().unwrap()).to_owned();
        Answer {
            status: response.status().as_u16(),
            kind,
            headers: response.headers().clone(),
            text: response.body_mut().with_config().limit(1 << 30).read_to_string().unwrap(),
        }
    }

    /// Asks for a path below `/api/v1`, and holds the answer against the description.
    pub(crate) fn ask(&self, method: &str, path: &str, kind: &str, body: impl Into<Vec<u8>>) -> Answer {
        let answer = self.send(method, &format!("/api/v1{path}"), &[("content-type", kind)], body.into());
        self.hold(method, path, &answer);
        answer
    }

    pub(crate) fn get(&self, path: &str) -> Answer {
        self.ask("GET", path, "", Vec::new())
    }

    pub(crate) fn post(&self, path: &str, body: impl Into<Vec<u8>>) -> Answer {
        self.ask("POST", path, "application/octet-stream", body)
    }

    /// The answer of an asking that must succeed.
    pub(crate) fn got(&self, path: &str) -> Value {
        let answer = self.get(path);
        assert_eq!(answer.status, 200, "{path}: {}", answer.text);
        answer.json()
    }

    /// Panics unless the description has this path, method and status, and the answer is what it says.
    fn hold(&self, method: &str, path: &str, answer: &Answer) {
        let path = format!("/api/v1{}", path.split('?').next().unwrap());
        let template = self.template(&path).unwrap_or_else(|| panic!("{path} is not described"));
        let lower = method.to_lowercase();
        let operation = &self.description["paths"][&template][&lower];
        assert!(operation.is_object(), "{method} {template} is not described");
        let response = &operation["responses"][answer.status.to_string()];
        assert!(
            response.is_object(),
            "{method} {template} may not answer {}: {}",
            answer.status,
            answer.text
        );
        let (described, content) = response["content"].as_object().unwrap().iter().next().unwrap();
        let is_problem = answer.kind == "application/problem+json";
        assert!(
            answer.kind.starts_with(described.as_str()) || is_problem,
            "{} is no {described}",
            answer.kind
        );
        let mut schema = content["schema"].clone();
        schema["components"] = self.description["components"].clone();
        let validator = jsonschema::validator_for(&schema).unwrap();
        let answered = answer.json();
        let faults: Vec<String> = validator
            .iter_errors(&answered)
            .map(|fault| format!("{}: {fault}", fault.instance_path()))
            .collect();
        assert!(faults.is_empty(), "{method} {path}: {faults:?}\n{}", answer.text);
        self.asked.lock().unwrap().push((template, lower));
    }

    /// The path of the description that a path is one of; one without parameters before one with.
    fn template(&self, path: &str) -> Option<String> {
        let fits = |template: &str| {
            let (template, path): (Vec<_>, Vec<_>) =
                (template.split('/').collect(), path.split('/').collect());
            template.len() == path.len()
                && template.iter().zip(path).all(|(a, b)| a.starts_with('{') || *a == b)
        };
        let paths = self.description["paths"].as_object().unwrap();
        let mut fitting: Vec<&String> = paths.keys().filter(|template| fits(template)).collect();
        fitting.sort_by_key(|template| template.matches('{').count());
        fitting.first().map(|template| (*template).clone())
    }

    /// Stores a plant; its id.
    pub(crate) fn plant(&self, text: &str) -> String {
        let answer = self.post("/plants", text);
        assert_eq!(answer.status, 201, "{}", answer.text);
        answer.json()["id"].as_str().unwrap().to_owned()
    }

    /// Uploads a log and waits until the work on it has ended; the log as it is then.
    pub(crate) fn log(&self, plant: &str, name: &str, periods: &str, text: &str) -> Value {
        let events = self.events(plant);
        let answer = self.post(&format!("/logs?plant={plant}&name={name}&periods={periods}"), text);
        assert_eq!(answer.status, 202, "{}", answer.text);
        let id = answer.json()["id"].clone();
        let ended = |log: &Value| !["waiting", "working"].contains(&log["state"].as_str().unwrap());
        events.into_iter().find(|log| log["id"] == id && ended(log)).unwrap()
    }

    /// What happens to the logs of a plant from now on.
    pub(crate) fn events(&self, plant: &str) -> impl Iterator<Item = Value> {
        let response = self.agent.get(format!("{}/api/v1/events?plant={plant}", self.base)).call().unwrap();
        assert_eq!(response.status(), 200);
        assert_eq!(response.headers()["content-type"], "text/event-stream");
        let lines = BufReader::new(response.into_body().into_reader()).lines();
        lines.map_while(Result::ok).filter_map(|line| {
            line.strip_prefix("data: ").map(|data| serde_json::from_str::<Value>(data).unwrap())
        })
    }
}

/// The reheat unit's log, one row an hour for so many hours from a time, every reading moved a little.
pub(crate) fn hourly_log(from: &str, hours: u32) -> String {
    let mut lines = REHEAT_LOG.lines().filter(|line| !line.starts_with('#'));
    let head = lines.next().unwrap();
    let row: Vec<&str> = lines.next().unwrap().split(',').collect();
    let begin: jiff::Timestamp = from.parse().unwrap();
    let mut log = format!("{head}\n");
    for hour in 0..hours {
        let time = begin + jiff::SignedDuration::from_hours(i64::from(hour));
        let values = row[1..].iter().enumerate().map(|(place, value)| {
            let moved = 1.0 + 2e-4 * (f64::from(hour) * 7.0 + place as f64 * 13.0).sin();
            value.parse().map_or_else(|_| (*value).to_owned(), |value: f64| format!("{:.4}", value * moved))
        });
        log.extend([time.to_string().as_str(), ",", &values.collect::<Vec<_>>().join(","), "\n"]);
    }
    log
}

/// Readings of the first row of the reheat unit's log.
pub(crate) fn readings() -> Value {
    let mut lines = REHEAT_LOG.lines();
    let names = lines.next().unwrap().split(',').skip(1);
    let values = lines.next().unwrap().split(',').skip(1);
    let pairs = names.zip(values).map(|(name, value)| (name.to_owned(), json!(value.parse::<f64>().ok())));
    Value::Object(pairs.collect())
}
