//! Lots.

use crate::support::Lab;

#[test]
fn an_empty_list_of_lots_says_what_comes_first() {
    let lab = Lab::new();
    lab.manager()
        .sees("/lots", "once one is approved, the operator or the lab manager records the first lot");
    assert_eq!(lab.analyst().get("/lots/new").status, 403);
    assert_eq!(lab.manager().get("/lots/77").status, 404);
}
