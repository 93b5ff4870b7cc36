//! How long a person must wait after failed passwords.

/// Failures that cost no wait.
const FREE_FAILURES: u32 = 5;
/// The longest wait, in seconds.
const LONGEST_WAIT_S: i64 = 15 * 60;
/// At this many failures in a row an administrator has to issue a code (NIST SP 800-63B: at most 100).
pub const MOST_FAILURES: u32 = 100;

/// Seconds to wait after this many failures in a row: none for five, then 1, 2, 4 … up to 15 minutes.
pub fn wait_s(failures: u32) -> i64 {
    if failures < FREE_FAILURES {
        return 0;
    }
    let doublings = (failures - FREE_FAILURES).min(20);
    (1_i64 << doublings).min(LONGEST_WAIT_S)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// sec_S20: waits grow from the fifth failure.
    #[test]
    fn waits_grow_and_end_at_fifteen_minutes() {
        let table = [(0, 0), (4, 0), (5, 1), (6, 2), (7, 4), (14, 512), (15, 900), (99, 900)];
        for (failures, seconds) in table {
            assert_eq!(wait_s(failures), seconds, "{failures}");
        }
    }
}
