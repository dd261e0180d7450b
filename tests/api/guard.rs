//! Who may ask, and what is said of everything else.

use crate::server::{REHEAT_UNIT, Server};

#[test]
fn pages_of_other_sites_change_nothing() {
    let server = Server::start();
    let send = |headers: &[(&str, &str)]| {
        server.client.send("POST", "/api/v1/plants", headers, REHEAT_UNIT.into()).status
    };
    assert_eq!(send(&[("origin", "http://plant.example")]), 403);
    assert_eq!(send(&[("sec-fetch-site", "cross-site")]), 403);
    assert_eq!(send(&[("host", "plant.example")]), 403);
    assert_eq!(send(&[("origin", &server.client.base), ("sec-fetch-site", "same-origin")]), 201);
}

#[test]
fn every_answer_has_an_id_and_keeps_the_page_to_itself() {
    let server = Server::start();
    for path in ["/", "/api/v1/status", "/api/v1/nothing", "/nothing.js", "/api/v1/openapi.json"] {
        let answer = server.client.send("GET", path, &[], Vec::new());
        let header = |name: &str| answer.headers.get(name).map_or("", |value| value.to_str().unwrap());
        assert!(header("x-request-id").len() > 30, "{path}");
        assert!(header("content-security-policy").starts_with("default-src 'self';"), "{path}");
        assert_eq!(header("x-content-type-options"), "nosniff", "{path}");
        if path.contains("nothing") {
            assert_eq!((answer.status, answer.kind.as_str()), (404, "application/problem+json"), "{path}");
        } else {
            assert_eq!(answer.status, 200, "{path}");
        }
    }
    let answer = server.client.send("PUT", "/api/v1/plants", &[], Vec::new());
    assert_eq!((answer.status, answer.kind.as_str()), (405, "application/problem+json"));
}

#[test]
fn a_file_of_the_page_is_sent_again_only_when_it_has_changed() {
    let server = Server::start();
    let first = server.client.send("GET", "/index.html", &[], Vec::new());
    assert_eq!((first.status, first.kind.as_str()), (200, "text/html; charset=utf-8"));
    let tag = first.headers["etag"].to_str().unwrap();
    let again = server.client.send("GET", "/index.html", &[("if-none-match", tag)], Vec::new());
    assert_eq!((again.status, again.text.as_str()), (304, ""));
}
