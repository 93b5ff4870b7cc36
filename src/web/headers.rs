//! The security headers on every answer (sec_S41) and the check of where a POST comes from (sec_S40).

use axum::http::{HeaderMap, HeaderName, HeaderValue, header};

const POLICY: &str = "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; font-src 'self'; \
     connect-src 'self'; form-action 'self'; base-uri 'none'; object-src 'none'; frame-ancestors 'none'";

/// Adds the headers that every answer carries.
pub fn secure(headers: &mut HeaderMap, is_static: bool, is_https: bool) {
    let mut set = |name: HeaderName, value: &'static str| {
        headers.entry(name).or_insert(HeaderValue::from_static(value));
    };
    set(header::CONTENT_SECURITY_POLICY, POLICY);
    set(header::X_CONTENT_TYPE_OPTIONS, "nosniff");
    set(header::REFERRER_POLICY, "same-origin");
    set(HeaderName::from_static("cross-origin-opener-policy"), "same-origin");
    set(HeaderName::from_static("cross-origin-resource-policy"), "same-origin");
    set(HeaderName::from_static("permissions-policy"), "camera=(), microphone=(), geolocation=()");
    let cache = if is_static { "public, max-age=31536000, immutable" } else { "no-store" };
    set(header::CACHE_CONTROL, cache);
    if is_https {
        set(header::STRICT_TRANSPORT_SECURITY, "max-age=31536000");
    }
}

/// Whether a POST comes from a page of ours: `Sec-Fetch-Site` where the browser sends it, else `Origin`.
pub fn is_from_our_pages(headers: &HeaderMap, public_origin: &str) -> bool {
    match headers.get("sec-fetch-site") {
        Some(site) => site == "same-origin",
        None => headers.get(header::ORIGIN).is_some_and(|origin| origin == public_origin),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// sec_S40: of these combinations only the own origin passes.
    #[test]
    fn only_our_own_pages_may_post() {
        let table = [
            (Some("same-origin"), None, true),
            (Some("cross-site"), Some("https://s.example"), false),
            (Some("none"), None, false),
            (None, Some("https://s.example"), true),
            (None, Some("https://other.example"), false),
            (None, Some("null"), false),
            (None, None, false),
        ];
        for (site, origin, expected) in table {
            let mut headers = HeaderMap::new();
            if let Some(site) = site {
                headers.insert("sec-fetch-site", HeaderValue::from_static(site));
            }
            if let Some(origin) = origin {
                headers.insert(header::ORIGIN, HeaderValue::from_static(origin));
            }
            assert_eq!(is_from_our_pages(&headers, "https://s.example"), expected, "{site:?} {origin:?}");
        }
    }
}
