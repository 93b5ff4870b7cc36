//! Passwords, tokens and the server's own key.

use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};

use argon2::password_hash::phc::PasswordHash;
use argon2::{Algorithm, Argon2, Params, PasswordHasher, PasswordVerifier, Version};
use hmac::{Hmac, KeyInit, Mac};
use sha2::Sha256;

use crate::domain::digest::{Encoder, hex};
use crate::domain::failure::Failure;
use crate::domain::password;

/// How dear one password hash is. `Demo` is accepted only in a data folder marked as a demo.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum HashCost {
    /// Argon2id, 46 MiB, one pass (sec_S14).
    Real,
    /// Argon2id, 64 KiB, one pass: for invented people only.
    Demo,
}

impl HashCost {
    fn hasher(self) -> Result<Argon2<'static>, Failure> {
        let memory_kib = match self {
            HashCost::Real => 47_104,
            HashCost::Demo => 64,
        };
        let params = Params::new(memory_kib, 1, 1, None).map_err(fault)?;
        Ok(Argon2::new(Algorithm::Argon2id, Version::V0x13, params))
    }
}

/// Two hashes at a time, so that a hundred sign-ins at once cost the memory of two (sec_S15).
static LANES: [Mutex<()>; 2] = [Mutex::new(()), Mutex::new(())];
/// Hashes that run or wait.
static WAITING: AtomicUsize = AtomicUsize::new(0);
/// Beyond this many the answer is "try again".
const MOST_WAITING: usize = 22;

/// A turn at hashing; the next one begins when it is dropped.
struct Lane {
    _turn: MutexGuard<'static, ()>,
}

impl Drop for Lane {
    fn drop(&mut self) {
        WAITING.fetch_sub(1, Ordering::SeqCst);
    }
}

fn lane() -> Result<Lane, Failure> {
    let before = WAITING.fetch_add(1, Ordering::SeqCst);
    if before >= MOST_WAITING {
        WAITING.fetch_sub(1, Ordering::SeqCst);
        return Err(Failure::Held(
            "Many people sign in at this moment. Try again in a few seconds.".to_string(),
        ));
    }
    let turn = LANES[before % LANES.len()].lock().unwrap_or_else(PoisonError::into_inner);
    Ok(Lane { _turn: turn })
}

fn fault(error: impl std::fmt::Display) -> Failure {
    Failure::fault(error.to_string())
}

/// What the program needs for secrets: the cost of a hash and its own key.
#[derive(Clone)]
pub struct Secrets {
    pub cost: HashCost,
    pub key: [u8; 32],
}

impl Secrets {
    /// The password as a PHC string with a fresh salt.
    pub fn hash(&self, password: &str) -> Result<String, Failure> {
        let _lane = lane()?;
        let hash = self.cost.hasher()?.hash_password(password::normal(password).as_bytes()).map_err(fault)?;
        Ok(hash.to_string())
    }

    /// Whether the password is the hashed one. Without a hash the same work is done and the answer is no,
    /// so that an unknown name takes as long as a wrong password (sec_S19).
    pub fn verify(&self, password: &str, hash: Option<&str>) -> Result<bool, Failure> {
        let Some(hash) = hash else {
            self.hash(password)?;
            return Ok(false);
        };
        let _lane = lane()?;
        let parsed = PasswordHash::new(hash).map_err(fault)?;
        Ok(self.cost.hasher()?.verify_password(password::normal(password).as_bytes(), &parsed).is_ok())
    }

    /// A keyed digest over length-prefixed parts, hexadecimal.
    pub fn keyed(&self, parts: &[&str]) -> Result<String, Failure> {
        Ok(hex(&self.mac(parts)?.finalize().into_bytes()))
    }

    /// Compares in constant time.
    pub fn is_keyed(&self, parts: &[&str], shown: &str) -> bool {
        let Some(bytes) = crate::domain::digest::from_hex(shown) else { return false };
        self.mac(parts).is_ok_and(|mac| mac.verify_slice(&bytes).is_ok())
    }

    fn mac(&self, parts: &[&str]) -> Result<Hmac<Sha256>, Failure> {
        let mut encoder = Encoder::new();
        for part in parts {
            encoder.text(part);
        }
        let mut mac = Hmac::<Sha256>::new_from_slice(&self.key).map_err(fault)?;
        mac.update(encoder.bytes());
        Ok(mac)
    }
}

/// Random bytes of the operating system.
pub fn random<const N: usize>() -> Result<[u8; N], Failure> {
    let mut bytes = [0; N];
    getrandom::fill(&mut bytes).map_err(fault)?;
    Ok(bytes)
}

/// A new token of 256 bits, hexadecimal.
pub fn token() -> Result<String, Failure> {
    Ok(hex(&random::<32>()?))
}

/// A one-time code of 128 bits in groups of four, without letters that look alike.
pub fn one_time_code() -> Result<String, Failure> {
    const LETTERS: &[u8; 32] = b"23456789abcdefghjkmnpqrstuvwxyzz";
    let bytes = random::<26>()?;
    let letters: Vec<char> = bytes.iter().map(|byte| LETTERS[usize::from(byte & 31)] as char).collect();
    let groups: Vec<String> = letters.chunks(4).map(|group| group.iter().collect()).collect();
    Ok(groups.join("-"))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn secrets(cost: HashCost) -> Secrets {
        Secrets { cost, key: [7; 32] }
    }

    /// sec_S14: the stored string names the algorithm and its cost.
    #[test]
    fn the_hash_names_its_cost() {
        let hash = secrets(HashCost::Real).hash("four herons in the mill pond").unwrap();
        assert!(hash.starts_with("$argon2id$v=19$m=47104,t=1,p=1$"), "{hash}");
    }

    /// sec_S13: what is verified is the normal form.
    #[test]
    fn a_password_is_verified_in_its_normal_form() {
        let secrets = secrets(HashCost::Demo);
        let hash = secrets.hash("caf\u{e9} on the quay").unwrap();
        assert!(secrets.verify("cafe\u{301} on the quay", Some(&hash)).unwrap());
        assert!(!secrets.verify("cafe on the quay", Some(&hash)).unwrap());
        assert!(!secrets.verify("anything", None).unwrap());
    }

    #[test]
    fn a_keyed_digest_fits_only_its_own_parts() {
        let secrets = secrets(HashCost::Demo);
        let shown = secrets.keyed(&["a", "bc"]).unwrap();
        assert!(secrets.is_keyed(&["a", "bc"], &shown));
        assert!(!secrets.is_keyed(&["ab", "c"], &shown));
        assert!(!secrets.is_keyed(&["a", "bc"], "zz"));
    }
}
