//! The page: static files inside the program.

use axum::body::Body;
use axum::http::{HeaderMap, Method, Response, StatusCode, Uri, header};
use axum::response::IntoResponse;
use include_dir::{Dir, include_dir};

use super::request::{no_such_method, no_such_path};

static FILES: Dir<'static> = include_dir!("$CARGO_MANIFEST_DIR/web");

/// Answers with a file of the page. What a browser has already and what hasn't changed isn't sent again.
pub(super) async fn file(method: Method, uri: Uri, headers: HeaderMap) -> Response<Body> {
    if uri.path().starts_with("/api/") {
        return no_such_path(uri).await.into_response();
    }
    let path = match uri.path().trim_start_matches('/') {
        "" => "index.html",
        path => path,
    };
    let Some(file) = FILES.get_file(path) else { return no_such_path(uri).await.into_response() };
    if method != Method::GET && method != Method::HEAD {
        return no_such_method(method, uri).await.into_response();
    }
    let tag = format!("\"{:08x}\"", crc32fast::hash(file.contents()));
    let kind = mime_guess::from_path(path).first_or_octet_stream().to_string();
    let is_known = headers.get(header::IF_NONE_MATCH).is_some_and(|known| known == tag.as_str());
    let head = [
        (
            header::CONTENT_TYPE,
            if kind.starts_with("text/") { format!("{kind}; charset=utf-8") } else { kind },
        ),
        (header::ETAG, tag),
        (header::CACHE_CONTROL, "no-cache".to_owned()),
    ];
    if is_known {
        return (StatusCode::NOT_MODIFIED, head).into_response();
    }
    (head, file.contents()).into_response()
}
