//! Inputs made from others, as a fuzzer makes them, but with draws that never change.

/// Makes inputs.
pub(crate) struct Mutants<'k> {
    kept: &'k [Vec<u8>],
    words: Vec<Vec<u8>>,
    state: u64,
}

/// Bytes at which parsers turn: signs, ends, the largest and smallest of their kind.
const TURNS: [u8; 18] = *b"\0\n\r\",:.-+eE[]{}9\x7f\xff";

impl<'k> Mutants<'k> {
    /// From inputs and a dictionary of libFuzzer: a quoted word a line, `#` begins a remark.
    pub(crate) fn new(kept: &'k [Vec<u8>], dictionary: &str) -> Mutants<'k> {
        let quoted = |line: &str| {
            let word = line.trim().strip_prefix('"')?.strip_suffix('"')?;
            Some(
                word.replace("\\\"", "\"")
                    .replace("\\\\", "\\")
                    .into_bytes(),
            )
        };
        Mutants {
            kept,
            words: dictionary.lines().filter_map(quoted).collect(),
            state: 0,
        }
    }

    /// One of the inputs, changed in one to four places.
    pub(crate) fn of(&mut self, which: usize) -> Vec<u8> {
        let mut input = self.kept[which].clone();
        for _ in 0..=self.below(4) {
            self.change(&mut input);
        }
        input
    }

    fn change(&mut self, input: &mut Vec<u8>) {
        let (from, to) = self.range(input.len());
        match self.below(7) {
            // A bit, or a whole byte.
            0 if from < input.len() => input[from] ^= 1 << self.below(8),
            1 if from < input.len() => input[from] = TURNS[self.below(TURNS.len())],
            // Bytes left out, given twice, or put elsewhere.
            2 => drop(input.drain(from..to)),
            3 => {
                let twice = input[from..to].to_vec();
                input.splice(to..to, twice);
            }
            4 => input.truncate(from),
            // A word of ours, or a piece of another input.
            5 if !self.words.is_empty() => {
                let word = self.below(self.words.len());
                input.splice(from..from, self.words[word].iter().copied());
            }
            _ => {
                let other = &self.kept[self.below(self.kept.len())];
                let (first, last) = self.range(other.len());
                input.splice(from..to, other[first..last].iter().copied());
            }
        }
    }

    /// A range of so many bytes, mostly a short one.
    fn range(&mut self, length: usize) -> (usize, usize) {
        let from = self.below(length + 1);
        let most = [4, 16, length][self.below(3)];
        let to = from + self.below(most + 1);
        (from, to.min(length))
    }

    /// A number below another (splitmix64; Steele, Lea and Flood 2014, from memory).
    fn below(&mut self, most: usize) -> usize {
        self.state = self.state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut x = self.state;
        x = (x ^ (x >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        x = (x ^ (x >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((x ^ (x >> 31)) % most as u64) as usize
    }
}
