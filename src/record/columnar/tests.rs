use super::*;
use proptest::prelude::*;
use std::fs;
use std::path::Path;

fn columns() -> Vec<Column> {
    [
        ("chain", Kind::Short),
        ("draw", Kind::Long),
        ("rate[\"Cawdle\"]", Kind::Real),
        ("phase", Kind::Text),
        ("link", Kind::Digest),
        ("state", Kind::Bytes),
    ]
    .map(|(name, kind)| (name.to_owned(), kind))
    .to_vec()
}

fn group(first: i64) -> Vec<Cells> {
    let rows = first..first + 3;
    vec![
        Cells::Short(rows.clone().map(|i| i as i32).collect()),
        Cells::Long(rows.clone().collect()),
        Cells::Real(vec![f64::NAN, -0.0, f64::INFINITY]),
        Cells::Text(rows.clone().map(|i| format!("draw {i}")).collect()),
        Cells::Digest(rows.clone().map(|i| [i as u8; 32]).collect()),
        Cells::Bytes(rows.map(|i| vec![7; i as usize]).collect()),
    ]
}

fn written(path: &Path) {
    let mut writer = Writer::create(path, &columns()).unwrap();
    for first in [0, 3] {
        writer
            .group(|column| Ok(group(first)[column].clone()))
            .unwrap();
    }
    writer.finish().unwrap();
}

/// Everything that can be read of a file.
fn all(path: &Path) -> Result<Vec<Vec<Cells>>, String> {
    let table = Table::open(path, &columns())?;
    let groups = 0..table.groups();
    let read = |group| (0..columns().len()).map(move |column| (group, column));
    groups
        .map(|group| read(group).map(|(g, c)| table.cells(g, c)).collect())
        .collect()
}

#[test]
fn what_was_written_is_read_and_repeats() {
    let folder = tempfile::tempdir().unwrap();
    let [a, b] = ["a.parquet", "b.parquet"].map(|name| folder.path().join(name));
    written(&a);
    written(&b);
    assert_eq!(fs::read(&a).unwrap(), fs::read(&b).unwrap());
    let read = all(&a).unwrap();
    assert_eq!(read.len(), 2);
    for (found, first) in read.iter().zip([0, 3]) {
        assert_eq!(found[0], group(first)[0]);
        assert_eq!(format!("{found:?}"), format!("{:?}", group(first)));
    }
    let other = [("x".to_owned(), Kind::Real)];
    assert!(Table::open(&a, &other).is_err());
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]
    /// Bytes changed anywhere: refused or read as something else, without a panic.
    #[test]
    fn changed_bytes_end_in_words(changes in prop::collection::vec((any::<u16>(), any::<u8>()), 1..4), cut in any::<u16>()) {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.parquet");
        written(&path);
        let mut bytes = fs::read(&path).unwrap();
        let length = bytes.len();
        for (at, byte) in changes {
            bytes[usize::from(at) % length] = byte;
        }
        if cut < 1000 {
            bytes.truncate(usize::from(cut) % length);
        }
        fs::write(&path, bytes).unwrap();
        let _ = all(&path);
    }
}
