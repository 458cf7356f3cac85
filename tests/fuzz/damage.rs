//! Changes of a file, drawn from a seed.

/// SplitMix64 (Steele, Lea and Flood 2014).
pub struct Random(u64);

impl Random {
    pub fn new(seed: u64) -> Self {
        Self(seed.wrapping_mul(0x9e37_79b9_7f4a_7c15))
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// A whole number below `end`, 0 where that is 0.
    pub fn below(&mut self, end: usize) -> usize {
        (self.next() % end.max(1) as u64) as usize
    }

    pub fn one_in(&mut self, chances: usize) -> bool {
        self.below(chances) == 0
    }

    pub fn of<'a, T>(&mut self, list: &'a [T]) -> &'a T {
        &list[self.below(list.len())]
    }
}

/// What no person means.
const NUMBERS: [&str; 34] = [
    "0",
    "-0",
    "1",
    "-1",
    "2",
    "3",
    "20",
    "0.5",
    "1000",
    "1001",
    "4294967295",
    "4294967296",
    "9223372036854775807",
    "9223372036854775808",
    "-9223372036854775808",
    "18446744073709551616",
    "1e9",
    "1e308",
    "1e309",
    "-1e308",
    "5e-324",
    "1e-400",
    "1e999999999999",
    "0x7fffffffffffffff",
    "0o17",
    "0b1",
    "1_000",
    "1__0",
    ".5",
    "5.",
    "+3",
    "inf",
    "-nan",
    "00",
];

const UNITS: [&str; 26] = [
    "GHz", "um", "µm", "μm", "mm^2", "mm²", "fF/um", "uA/V^2", "mV/K", "1/V", "ohm um", "Ω",
    "degC", "K", "dBm", "dB", "dBc", "W", "nA/um", "S/um^2", "nH", "mm^2/nH", "", " ", "/", "^^",
];

const PIECES: [&str; 40] = [
    "=",
    "==",
    "[",
    "]",
    "[[",
    "]]",
    "{",
    "}",
    ",",
    ".",
    "\"",
    "'",
    "\"\"\"",
    "'''",
    "#",
    "\n",
    "\r",
    "\r\n",
    "\t",
    "\0",
    "\u{feff}",
    "\u{202e}",
    "\\",
    "\\u",
    "\\uD800",
    "\\U00110000",
    "true",
    "false",
    "null",
    "NaN",
    "nan",
    "1979-05-27",
    "07:32:00Z",
    "{ from = 0, to = 0 }",
    "{ from = 1, to = 20, steps = 1000 }",
    "{}",
    "[]",
    "[1, 2]",
    "\u{1f600}",
    "é",
];

/// One to four changes.
pub fn damaged(base: &[u8], others: &[Vec<u8>], random: &mut Random) -> Vec<u8> {
    let mut text = base.to_vec();
    // Now and then a good file stays as it is.
    if random.one_in(16) {
        return text;
    }
    let changes = if random.one_in(2) {
        1
    } else {
        1 + random.below(4)
    };
    for _ in 0..changes {
        change(&mut text, others, random);
    }
    text
}

fn change(text: &mut Vec<u8>, others: &[Vec<u8>], random: &mut Random) {
    let place = random.below(text.len() + 1);
    match random.below(16) {
        0 => {
            if let Some(byte) = text.get_mut(place) {
                *byte ^= 1 << random.below(8);
            }
        }
        1 => {
            let end = (place + 1 + random.below(40)).min(text.len());
            text.drain(place.min(end)..end);
        }
        2 => text.truncate(place),
        3 | 4 => insert(text, place, random.of(&PIECES).as_bytes()),
        5..=7 => number(text, place, random),
        8 => unit(text, place, random),
        9 => nest(text, place, random),
        10 => {
            let other = random.of(others).clone();
            let line = random.of(&lines(&other)).clone();
            let at = line_begin(text, place);
            insert(text, at, &other[line]);
        }
        11 => {
            let lines = lines(text);
            let line = text[random.of(&lines).clone()].to_vec();
            let at = line_begin(text, place);
            for _ in 0..=random.below(3) {
                insert(text, at, &line);
            }
        }
        12 => {
            let lines = lines(text);
            text.drain(random.of(&lines).clone());
        }
        13 => {
            let lines = lines(text);
            let (a, b) = (random.of(&lines).clone(), random.of(&lines).clone());
            let (a, b) = if a.start <= b.start { (a, b) } else { (b, a) };
            if a.end <= b.start {
                let swapped = [&text[b.clone()], &text[a.end..b.start], &text[a.clone()]].concat();
                text.splice(a.start..b.end, swapped);
            }
        }
        14 => {
            let other = random.of(others);
            let tail = line_begin(other, random.below(other.len() + 1));
            let head = line_begin(text, place);
            text.truncate(head);
            text.extend_from_slice(&other[tail..]);
        }
        _ => {
            let long = 1 << random.below(14);
            let letter = *random.of(b"a0 #\"[.,\n-");
            let row = vec![letter; long];
            insert(text, place, &row);
        }
    }
}

fn insert(text: &mut Vec<u8>, at: usize, piece: &[u8]) {
    text.splice(at..at, piece.iter().copied());
}

/// Lines with their ends; one empty line where there is none.
fn lines(text: &[u8]) -> Vec<std::ops::Range<usize>> {
    let mut lines = Vec::new();
    let mut begin = 0;
    for line in text.split_inclusive(|b| *b == b'\n') {
        lines.push(begin..begin + line.len());
        begin += line.len();
    }
    if lines.is_empty() {
        lines.push(0..0);
    }
    lines
}

fn line_begin(text: &[u8], at: usize) -> usize {
    let before = &text[..at.min(text.len())];
    before
        .iter()
        .rposition(|b| *b == b'\n')
        .map_or(0, |newline| newline + 1)
}

/// Puts another number in the place of the next one.
fn number(text: &mut Vec<u8>, place: usize, random: &mut Random) {
    let is_part = |b: &u8| b.is_ascii_digit() || *b == b'.';
    let Some(begin) = text[place.min(text.len())..].iter().position(is_part) else {
        return;
    };
    let begin = begin + place;
    let length = text[begin..]
        .iter()
        .position(|b| !is_part(b))
        .unwrap_or(text.len() - begin);
    let new = if random.one_in(3) {
        // Near what stands there: still good, mostly.
        let old: f64 = std::str::from_utf8(&text[begin..begin + length])
            .ok()
            .and_then(|t| t.parse().ok())
            .unwrap_or(1.0);
        let factor = *random.of(&[0.5, 0.9, 1.01, 1.5, 2.0, 10.0, 1e-3]);
        format!("{}", old * factor)
    } else {
        (*random.of(&NUMBERS)).to_owned()
    };
    text.splice(begin..begin + length, new.into_bytes());
}

/// Puts another unit in the place of the letters after the next number.
fn unit(text: &mut Vec<u8>, place: usize, random: &mut Random) {
    let Some(digit) = text[place.min(text.len())..]
        .iter()
        .position(u8::is_ascii_digit)
    else {
        return;
    };
    let begin = place + digit + 1;
    let end = text[begin..]
        .iter()
        .position(|b| matches!(b, b'"' | b'\n' | b','));
    let end = end.map_or(text.len(), |e| begin + e);
    let unit = format!(" {}", random.of(&UNITS));
    text.splice(begin..end, unit.into_bytes());
}

/// Nests deep: lists, tables, dotted keys, headers.
fn nest(text: &mut Vec<u8>, place: usize, random: &mut Random) {
    let depth = 1 << random.below(11);
    let at = line_begin(text, place);
    let piece = match random.below(6) {
        0 => format!("{}1{}", "[".repeat(depth), "]".repeat(depth)),
        1 => format!("{}1{}", "{ a = ".repeat(depth), " }".repeat(depth)),
        2 => format!("k{} = 1\n", ".k".repeat(depth)),
        3 => format!("[h{}]\n", ".h".repeat(depth)),
        4 => format!("{}1{}", "{\"a\":".repeat(depth), "}".repeat(depth)),
        _ => format!("[[h{}]]\n", ".h".repeat(depth)),
    };
    // A whole line, or in the place of a value.
    let here = if random.one_in(2) {
        at
    } else {
        let equals = text[at..].iter().position(|b| matches!(b, b'=' | b':'));
        equals.map_or(at, |e| at + e + 1)
    };
    insert(text, here, piece.as_bytes());
}
