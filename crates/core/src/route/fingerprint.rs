use std::fmt::{self, Write as _};
use std::str::FromStr;

use nalgebra::Matrix3;

use crate::instrument::Instrument;

/// A number that changes when UB, the wavelength or the machine does, and stays the same from run to run and from
/// computer to computer. A list carries it, so that it can be told from which session it came.
///
/// **Method.** FNV-1a, 64 bits (Fowler, Noll & Vo; IETF RFC 9923), of a text: UB row by row and the wavelength with ten
/// decimals each (below any digit that matters, above rounding noise), and the machine's description as RON without its
/// remarks.
///
/// **Limitation.** It tells a change, not who made it: it is no signature.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Fingerprint(u64);

/// A text that is no fingerprint.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{0:?} is no fingerprint; accepted are 16 hexadecimal digits")]
pub struct FingerprintError(String);

impl Fingerprint {
    /// The fingerprint of `ub` (columns a*, b*, c* in the head frame, Å⁻¹), a wavelength in Å and a machine.
    pub fn of(ub: &Matrix3<f64>, wavelength_angstrom: f64, instrument: &Instrument) -> Self {
        let mut text = String::new();
        for row in ub.row_iter() {
            for element in row.iter() {
                write_number(&mut text, *element);
            }
        }
        write_number(&mut text, wavelength_angstrom);
        let mut machine = instrument.description().clone();
        machine.note.clear();
        // A description came from RON or was checked like one, so it can be written; if it could not, its debug text
        // would still tell machines apart.
        text.push_str(&ron::to_string(&machine).unwrap_or_else(|_| format!("{machine:?}")));
        Self(fnv_1a(text.as_bytes()))
    }
}

fn write_number(text: &mut String, number: f64) {
    let digits = format!("{number:.10}");
    // A tiny negative number must not differ from zero by its sign.
    let plain = digits.strip_prefix('-').filter(|rest| rest.chars().all(|c| c == '0' || c == '.')).unwrap_or(&digits);
    let _ = writeln!(text, "{plain}");
}

fn fnv_1a(bytes: &[u8]) -> u64 {
    bytes.iter().fold(0xcbf2_9ce4_8422_2325, |hash, &byte| (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3))
}

impl fmt::Display for Fingerprint {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:016x}", self.0)
    }
}

impl FromStr for Fingerprint {
    type Err = FingerprintError;
    fn from_str(text: &str) -> Result<Self, FingerprintError> {
        let refuse = || FingerprintError(text.chars().take(40).collect());
        if text.len() != 16 || !text.bytes().all(|b| b.is_ascii_hexdigit()) {
            return Err(refuse());
        }
        u64::from_str_radix(text, 16).map(Self).map_err(|_| refuse())
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::instrument::built_in_machine;

    /// Test vectors of the algorithm: IETF RFC 9923, appendix C (from memory).
    #[test]
    fn the_hash_is_the_published_one() {
        assert_eq!(fnv_1a(b""), 0xcbf2_9ce4_8422_2325);
        assert_eq!(fnv_1a(b"a"), 0xaf63_dc4c_8601_ec8c);
        assert_eq!(fnv_1a(b"foobar"), 0x8594_4171_f739_67e8);
    }

    #[test]
    fn it_changes_with_what_matters_and_with_nothing_else() {
        let machine = built_in_machine("eulerian-four-circle").unwrap();
        let ub = Matrix3::new(0.1, 0.0, 1e-17, 0.0, 0.12, 0.0, -1e-17, 0.0, 0.05);
        let here = Fingerprint::of(&ub, 0.71, &machine);
        let noise = Matrix3::new(0.1, 0.0, -1e-17, 0.0, 0.12 + 1e-16, 0.0, 1e-16, 0.0, 0.05);
        assert_eq!(Fingerprint::of(&noise, 0.71, &machine), here);
        let mut remarked = machine.description().clone();
        remarked.note = "swept on Monday".to_owned();
        assert_eq!(Fingerprint::of(&ub, 0.71, &Instrument::new(remarked).unwrap()), here);
        let mut turned = ub;
        turned[(0, 1)] += 1e-8;
        assert_ne!(Fingerprint::of(&turned, 0.71, &machine), here);
        assert_ne!(Fingerprint::of(&ub, 0.7100001, &machine), here);
        assert_ne!(Fingerprint::of(&ub, 0.71, &built_in_machine("kappa-four-circle").unwrap()), here);
        assert_eq!(here.to_string().parse::<Fingerprint>(), Ok(here));
        for wrong in ["", "12", "g123456789abcdef", "+123456789abcdef", "0123456789abcdef0"] {
            assert!(wrong.parse::<Fingerprint>().is_err(), "{wrong}");
        }
    }
}
