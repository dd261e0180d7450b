//! Who may ask: pages of other sites may not.

use axum::extract::{Request, State};
use axum::http::uri::Authority;
use axum::http::{HeaderMap, Method, StatusCode, header};
use axum::middleware::Next;
use axum::response::{IntoResponse, Response};

use super::problem::Problem;

/// Whether the service may be asked under any name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Reach {
    /// From this machine alone: the name asked for must be one of the machine's own, lest a page elsewhere whose name leads
    /// here asks.
    Loopback,
    /// From anywhere.
    Remote,
}

/// Lets a request through unless a page of another site makes it.
pub(super) async fn guard(State(reach): State<Reach>, request: Request, next: Next) -> Response {
    let headers = request.headers();
    let host = headers.get(header::HOST).and_then(|host| host.to_str().ok()).unwrap_or_default();
    if reach == Reach::Loopback && !is_loopback(host) {
        return refused(format!("this service answers to names of its own machine, not to `{host}`"));
    }
    let changes = !matches!(*request.method(), Method::GET | Method::HEAD | Method::OPTIONS);
    if changes && is_foreign(headers, host) {
        return refused("a page of another site may change nothing here");
    }
    next.run(request).await
}

fn refused(detail: impl Into<String>) -> Response {
    Problem::new(StatusCode::FORBIDDEN, detail).into_response()
}

/// Whether a host's name is that of this machine to itself.
fn is_loopback(host: &str) -> bool {
    let name = host.parse::<Authority>().map(|authority| authority.host().to_owned()).unwrap_or_default();
    let address = name.trim_start_matches('[').trim_end_matches(']').parse::<std::net::IpAddr>();
    name == "localhost" || address.is_ok_and(|address| address.is_loopback())
}

/// Whether a browser says that a page of another site asks.
fn is_foreign(headers: &HeaderMap, host: &str) -> bool {
    let text = |name| headers.get(name).and_then(|value| value.to_str().ok());
    let is_cross_site = text("sec-fetch-site").is_some_and(|site| !matches!(site, "same-origin" | "none"));
    let is_other_origin = text("origin").is_some_and(|origin| {
        origin.strip_prefix("http://").or_else(|| origin.strip_prefix("https://")) != Some(host)
    });
    is_cross_site || is_other_origin
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_the_machine_s_own_names_are_loopback() {
        for own in ["localhost", "localhost:8080", "127.0.0.1:80", "[::1]:9", "127.8.8.8"] {
            assert!(is_loopback(own), "{own}");
        }
        for other in ["", "plant.example", "localhost.evil.example:80", "10.0.0.1", "127.0.0.1.evil.example"]
        {
            assert!(!is_loopback(other), "{other}");
        }
    }

    #[test]
    fn a_browser_tells_foreign_pages() {
        let headers = |pairs: &[(&'static str, &str)]| -> HeaderMap {
            pairs.iter().map(|(name, value)| (name.parse().unwrap(), value.parse().unwrap())).collect()
        };
        let host = "localhost:8080";
        assert!(!is_foreign(&headers(&[]), host), "a script");
        assert!(!is_foreign(&headers(&[("origin", "http://localhost:8080")]), host));
        assert!(!is_foreign(&headers(&[("sec-fetch-site", "same-origin")]), host));
        assert!(is_foreign(&headers(&[("origin", "http://localhost:8081")]), host));
        assert!(is_foreign(&headers(&[("origin", "null")]), host));
        assert!(is_foreign(&headers(&[("sec-fetch-site", "cross-site")]), host));
    }
}
