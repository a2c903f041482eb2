//! Walks the Thrift (compact protocol) structures of a Parquet file before the library reads them.

/// How deep structures and lists may stand in one another; an honest footer takes 8.
const DEEPEST: usize = 16;
/// A structure in a list takes at least this many bytes in an honest footer.
const LEAST_STRUCTURE: usize = 3;

/// Structures in lists at most: columns of groups of rows, for the most part. The library makes about 700 bytes of
/// each.
const MOST_STRUCTURES: u64 = 1 << 20;

struct Walk<'a> {
    bytes: &'a [u8],
    at: usize,
    structures: u64,
}

impl<'a> Walk<'a> {
    fn new(bytes: &'a [u8]) -> Walk<'a> {
        Walk {
            bytes,
            at: 0,
            structures: 0,
        }
    }
}

impl Walk<'_> {
    fn byte(&mut self) -> Option<u8> {
        let byte = *self.bytes.get(self.at)?;
        self.at += 1;
        Some(byte)
    }

    fn varint(&mut self) -> Option<u64> {
        let mut value = 0;
        for shift in (0..70).step_by(7) {
            let byte = self.byte()?;
            let part = u64::from(byte & 0x7f);
            value |= part.checked_shl(shift)?;
            if byte & 0x80 == 0 {
                return Some(value);
            }
        }
        None
    }

    fn zigzag(&mut self) -> Option<i64> {
        let value = self.varint()?;
        Some((value >> 1) as i64 ^ -((value & 1) as i64))
    }

    fn skip(&mut self, count: u64) -> Option<()> {
        let count = usize::try_from(count).ok()?;
        let left = self.bytes.len() - self.at;
        (count <= left).then(|| self.at += count)
    }

    fn value(&mut self, kind: u8, depth: usize) -> Option<()> {
        match kind {
            // A boolean's value is its type.
            1 | 2 => Some(()),
            3 => self.skip(1),
            4..=6 => self.varint().map(|_| ()),
            7 => self.skip(8),
            8 => {
                let length = self.varint()?;
                self.skip(length)
            }
            9 | 10 => self.list(depth + 1),
            12 => self.structure(depth + 1),
            _ => None,
        }
    }

    fn list(&mut self, depth: usize) -> Option<()> {
        if depth > DEEPEST {
            return None;
        }
        let head = self.byte()?;
        let kind = head & 0x0f;
        let count = match head >> 4 {
            15 => self.varint()?,
            short => u64::from(short),
        };
        let least = if kind == 12 { LEAST_STRUCTURE } else { 1 };
        let left = (self.bytes.len() - self.at) / least;
        if count > left as u64 {
            return None;
        }
        if kind == 12 {
            self.structures += count;
            if self.structures > MOST_STRUCTURES {
                return None;
            }
        }
        for _ in 0..count {
            match kind {
                // In a list a boolean is a byte.
                1 | 2 => self.skip(1)?,
                _ => self.value(kind, depth)?,
            }
        }
        Some(())
    }

    fn structure(&mut self, depth: usize) -> Option<()> {
        if depth > DEEPEST {
            return None;
        }
        loop {
            let head = self.byte()?;
            if head == 0 {
                return Some(());
            }
            if head >> 4 == 0 {
                self.varint()?;
            }
            self.value(head & 0x0f, depth)?;
        }
    }

    /// The fields of a structure that has none but 32-bit numbers, and where `inner` says so one such structure,
    /// whose fields follow from place 16.
    fn numbers(&mut self, inner: Option<i64>) -> Option<[i64; 32]> {
        let mut fields = [i64::MIN; 32];
        let mut last = 0;
        loop {
            let head = self.byte()?;
            if head == 0 {
                return Some(fields);
            }
            last = match head >> 4 {
                0 => self.zigzag()?,
                step => last + i64::from(step),
            };
            let place = usize::try_from(last).ok().filter(|place| *place < 16)?;
            match head & 0x0f {
                5 => fields[place] = self.zigzag()?,
                12 if inner == Some(last) => {
                    let own = self.numbers(None)?;
                    fields[16..].copy_from_slice(&own[..16]);
                }
                _ => return None,
            }
        }
    }
}

/// Whether a footer is one whole structure whose counts its own bytes bear out.
pub fn footer(bytes: &[u8]) -> bool {
    let mut walk = Walk::new(bytes);
    walk.structure(0).is_some() && walk.at == bytes.len()
}

/// A data page of plain cells.
pub struct Page<'a> {
    pub cells: usize,
    pub unpacked: usize,
    pub packed: &'a [u8],
}

/// The pages that the bytes of a column are made of; `None` where they are not whole data pages of plain cells, or
/// claim to unpack to more than `all` bytes together.
pub fn pages(bytes: &[u8], all: u64) -> Option<Vec<Page<'_>>> {
    // Fields of a page header.
    const KIND: usize = 1;
    const UNPACKED: usize = 2;
    const PACKED: usize = 3;
    const DATA: i64 = 5;
    const CELLS: usize = 16 + 1;
    const ENCODING: usize = 16 + 2;
    let mut walk = Walk::new(bytes);
    let mut pages = Vec::new();
    let mut left = all;
    while walk.at < bytes.len() {
        let fields = walk.numbers(Some(DATA))?;
        if (fields[KIND], fields[ENCODING]) != (0, 0) {
            return None;
        }
        let size = |field: usize| u64::try_from(fields[field]).ok();
        let unpacked = size(UNPACKED)?;
        left = left.checked_sub(unpacked)?;
        let from = walk.at;
        walk.skip(size(PACKED)?)?;
        pages.push(Page {
            cells: usize::try_from(size(CELLS)?).ok()?,
            unpacked: usize::try_from(unpacked).ok()?,
            packed: &bytes[from..walk.at],
        });
    }
    Some(pages)
}
