//! PCG64-DXSM (O'Neill 2014; the DXSM output function as in `rand_pcg`), state and increment taken from a
//! SHA-256 over length-prefixed fields.

use rand_core::Rng;
use rand_pcg::Lcg128CmDxsm64;
use sha2::{Digest, Sha256};

/// What a stream is for; part of its seed, so that no two purposes share words.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Purpose {
    /// The start of a chain.
    Start,
    /// The kernels of a chain.
    Walk,
    /// One draw of a predicted quantity.
    Prediction { quantity: u64, draw: u64 },
    /// Statistical tests of the program itself.
    Test,
}

/// One stream of random 64-bit words. Keeps no spare value: its state is 32 bytes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Stream {
    generator: Lcg128CmDxsm64,
}

impl Stream {
    /// The stream of a chain's key for a purpose.
    pub fn new(key: &[u8; 32], purpose: Purpose) -> Stream {
        let (name, quantity, draw) = match purpose {
            Purpose::Start => ("start", 0, 0),
            Purpose::Walk => ("walk", 0, 0),
            Purpose::Prediction { quantity, draw } => ("prediction", quantity, draw),
            Purpose::Test => ("test", 0, 0),
        };
        let mut hash = Sha256::new();
        for field in [
            b"odograph stream".as_slice(),
            key,
            name.as_bytes(),
            &quantity.to_le_bytes(),
            &draw.to_le_bytes(),
        ] {
            hash.update((field.len() as u64).to_le_bytes());
            hash.update(field);
        }
        Stream::load(&hash.finalize().into())
    }

    /// The next 64 random bits.
    #[inline]
    pub fn word(&mut self) -> u64 {
        self.generator.next_u64()
    }

    /// Uniform on the multiples of 2^-53 in [0, 1).
    #[inline]
    pub fn unit(&mut self) -> f64 {
        (self.word() >> 11) as f64 * (1.0 / 9007199254740992.0)
    }

    /// Uniform on the open interval (0, 1): the odd multiples of 2^-54. Never 0, never 1.
    #[inline]
    pub fn open(&mut self) -> f64 {
        ((self.word() >> 11) as f64 + 0.5) * (1.0 / 9007199254740992.0)
    }

    /// The exact state: generator state, then its increment without the low bit, little-endian.
    pub fn save(&self) -> [u8; 32] {
        let mut bytes = [0; 32];
        bytes[..16].copy_from_slice(&self.generator.state().to_le_bytes());
        bytes[16..].copy_from_slice(&self.generator.stream().to_le_bytes());
        bytes
    }

    /// The stream with a saved state.
    pub fn load(bytes: &[u8; 32]) -> Stream {
        let (state, stream) = bytes.split_at(16);
        let word = |half: &[u8]| u128::from_le_bytes(half.try_into().expect("16 bytes"));
        Stream {
            generator: Lcg128CmDxsm64::from_state(word(state), word(stream)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use toml::{Table, Value};

    /// NumPy 2.4.6's own words, checked against plain integers; the file names its source.
    const REFERENCE: &str = include_str!("../../tests/reference/06_pcg.toml");

    fn entries(kind: &str) -> Vec<Table> {
        let file: Table = REFERENCE.parse().expect("strict TOML");
        let entries = file[kind].as_array().expect("an array of tables");
        entries
            .iter()
            .filter_map(Value::as_table)
            .filter(|entry| entry["generator"].as_str() == Some("PCG64DXSM"))
            .cloned()
            .collect()
    }

    fn hex(value: &Value) -> u128 {
        let text = value.as_str().expect("a string").trim_start_matches("0x");
        u128::from_str_radix(text, 16).expect("a hexadecimal number")
    }

    fn stream(entry: &Table) -> Stream {
        let mut bytes = [0; 32];
        bytes[..16].copy_from_slice(&hex(&entry["state"]).to_le_bytes());
        bytes[16..].copy_from_slice(&(hex(&entry["inc"]) >> 1).to_le_bytes());
        Stream::load(&bytes)
    }

    fn outputs(entry: &Table) -> impl Iterator<Item = u64> {
        let list = entry["outputs"].as_array().expect("an array");
        list.iter().map(|word| hex(word) as u64)
    }

    fn state(stream: &Stream) -> u128 {
        u128::from_le_bytes(stream.save()[..16].try_into().expect("16 bytes"))
    }

    #[test]
    fn words_and_states_are_those_of_numpy() {
        let sequences = entries("sequence");
        assert!(sequences.len() >= 3);
        for entry in &sequences {
            let mut words = stream(entry);
            for expected in outputs(entry) {
                assert_eq!(words.word(), expected);
            }
            assert_eq!(state(&words), hex(&entry["state_after_16"]));
            let mut doubles = stream(entry);
            for expected in entry["first_doubles_53bit"].as_array().expect("an array") {
                assert_eq!(Some(doubles.unit()), expected.as_float());
            }
        }
    }

    #[test]
    fn stepping_far_is_numpys_advance() {
        let mut tried = 0;
        for entry in entries("advanced") {
            let delta = hex(&entry["delta"]);
            if delta > 1_000_000 {
                continue;
            }
            tried += 1;
            let mut words = stream(&entry);
            for _ in 0..delta {
                words.word();
            }
            assert_eq!(state(&words), hex(&entry["state_after_advance"]));
            for expected in outputs(&entry) {
                assert_eq!(words.word(), expected);
            }
        }
        assert!(tried >= 3);
    }

    #[test]
    fn a_saved_stream_goes_on_where_it_was() {
        let mut first = Stream::new(&[9; 32], Purpose::Walk);
        first.word();
        let mut second = Stream::load(&first.save());
        assert!((0..100).all(|_| first.word() == second.word()));
    }

    #[test]
    fn keys_and_purposes_have_streams_of_their_own() {
        let prediction = |quantity, draw| Purpose::Prediction { quantity, draw };
        let purposes = [
            Purpose::Start,
            Purpose::Walk,
            Purpose::Test,
            prediction(0, 0),
            prediction(0, 1),
            prediction(1, 0),
        ];
        let mut seen: Vec<[u8; 32]> = Vec::new();
        for key in [[0; 32], [1; 32]] {
            seen.extend(purposes.map(|purpose| Stream::new(&key, purpose).save()));
        }
        seen.sort();
        seen.dedup();
        assert_eq!(seen.len(), 2 * purposes.len());
    }

    #[test]
    fn open_numbers_never_reach_the_ends() {
        let words = Stream::new(&[1; 32], Purpose::Test);
        let mut units = words.clone();
        let mut opens = words;
        for _ in 0..10_000 {
            let (unit, open) = (units.unit(), opens.open());
            assert!((0.0..1.0).contains(&unit) && 0.0 < open && open < 1.0);
            assert_eq!(open, unit + 0.5 / 9007199254740992.0);
        }
    }
}
