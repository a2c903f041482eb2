//! An index of the records under a folder, so that looking through thousands is quick. It is made from the records
//! and can be thrown away at any time; nothing is believed because it stands there.

use super::survey::{Found, Glance, Headline, State, glance, headlines};
use crate::canon::Json;
use rusqlite::{Connection, OptionalExtension, params};
use std::fs;
use std::path::{Path, PathBuf};
use std::time::Duration;

/// Its name in the folder that is surveyed.
pub const NAME: &str = ".odograph-index.sqlite";

/// Raised when the layout changes; an index of another is thrown away.
const LAYOUT: i64 = 1;

/// An open index, or none where none can be written.
pub struct Index(Option<Connection>);

impl Index {
    /// Opens the index of a folder; makes it anew when it cannot be used.
    pub fn open(folder: &Path) -> Index {
        let path = folder.join(NAME);
        let opened = connect(&path).or_else(|_| {
            // Not ours, torn or of another layout.
            let plain = fs::symlink_metadata(&path).is_ok_and(|found| found.is_file());
            if plain {
                let _ = fs::remove_file(&path);
            }
            connect(&path)
        });
        Index(opened.ok())
    }

    /// What is told of a record: from the index if the record is as it was, else from its files.
    pub fn glance(&self, found: &Found) -> Glance {
        if let Some(known) = self.known(found) {
            return known;
        }
        let glance = glance(found);
        if let Some(connection) = &self.0 {
            let _ = connection.execute(
                "INSERT OR REPLACE INTO record (path, fingerprint, glance) VALUES (?1, ?2, ?3)",
                params![found.path, found.fingerprint, written(&glance).canonical()],
            );
        }
        glance
    }

    fn known(&self, found: &Found) -> Option<Glance> {
        let connection = self.0.as_ref()?;
        let text: Option<String> = connection
            .query_row(
                "SELECT glance FROM record WHERE path = ?1 AND fingerprint = ?2",
                params![found.path, found.fingerprint],
                |row| row.get(0),
            )
            .optional()
            .ok()?;
        read(&Json::read(&text?).ok()?, found)
    }

    /// Forgets records that are gone.
    pub fn keep_only(&self, found: &[Found]) {
        let Some(connection) = &self.0 else { return };
        let forget = || -> rusqlite::Result<()> {
            let mut statement = connection.prepare("SELECT path FROM record")?;
            let known: Vec<String> = statement
                .query_map([], |row| row.get(0))?
                .flatten()
                .collect();
            for path in known {
                if found.binary_search_by(|one| one.path.cmp(&path)).is_err() {
                    connection.execute("DELETE FROM record WHERE path = ?1", params![path])?;
                }
            }
            Ok(())
        };
        let _ = forget();
    }
}

fn connect(path: &PathBuf) -> rusqlite::Result<Connection> {
    let linked = fs::symlink_metadata(path).is_ok_and(|found| !found.is_file());
    if linked {
        return Err(rusqlite::Error::InvalidPath(path.clone()));
    }
    let connection = Connection::open(path)?;
    connection.busy_timeout(Duration::from_secs(2))?;
    let layout: i64 = connection.query_row("PRAGMA user_version", [], |row| row.get(0))?;
    let tables: i64 =
        connection.query_row("SELECT count(*) FROM sqlite_master", [], |row| row.get(0))?;
    if tables > 0 && layout != LAYOUT {
        return Err(rusqlite::Error::InvalidQuery);
    }
    connection.execute_batch(
        "CREATE TABLE IF NOT EXISTS record (path TEXT PRIMARY KEY, fingerprint TEXT NOT NULL, glance TEXT NOT NULL);
         PRAGMA user_version = 1;",
    )?;
    Ok(connection)
}

/// A glance as JSON.
pub fn written(glance: &Glance) -> Json {
    let maybe = |value: Option<f64>| value.map_or(Json::Null, Json::real);
    let headline = |one: &Headline| {
        Json::object([
            ("name", Json::text(one.name.clone())),
            ("unit", one.unit.clone().map_or(Json::Null, Json::text)),
            ("value", maybe(one.value)),
            ("mcse", maybe(one.mcse)),
        ])
    };
    Json::object([
        ("path", Json::text(glance.path.clone())),
        ("state", Json::text(glance.state.word())),
        ("words", Json::text(glance.words.clone())),
        ("title", Json::text(glance.title.clone())),
        ("question", Json::text(glance.question.clone())),
        ("plan_digest", Json::text(glance.plan_digest.clone())),
        ("result_digest", Json::text(glance.result_digest.clone())),
        ("goal", Json::text(glance.goal.clone())),
        ("points", Json::Count(glance.points)),
        ("estimands", Json::Count(glance.estimands)),
        (
            "figures",
            Json::array(glance.headlines.iter().map(headline)),
        ),
    ])
}

fn read(json: &Json, found: &Found) -> Option<Glance> {
    let text = |key: &str| json.get(key).and_then(Json::as_text).map(str::to_owned);
    let count = |key: &str| json.get(key).and_then(Json::as_count);
    let states = [State::Sealed, State::Open, State::Unreadable];
    let state = text("state")?;
    Some(Glance {
        path: found.path.clone(),
        state: states.into_iter().find(|known| known.word() == state)?,
        words: text("words")?,
        title: text("title")?,
        question: text("question")?,
        plan_digest: text("plan_digest")?,
        result_digest: text("result_digest")?,
        goal: text("goal")?,
        points: count("points")?,
        estimands: count("estimands")?,
        headlines: headlines(json.get("figures")?.items()),
    })
}

#[cfg(test)]
mod tests {
    use super::super::survey::survey;
    use super::*;

    fn record(top: &Path, name: &str, summary: &str) {
        let path = top.join(name);
        fs::create_dir_all(path.join("data")).unwrap();
        fs::write(path.join("bagit.txt"), "").unwrap();
        fs::write(path.join("data/trail.parquet"), "").unwrap();
        fs::write(
            path.join("data/plan.json"),
            "{\"title\": \"T\", \"plan_digest\": \"ab\"}",
        )
        .unwrap();
        fs::write(path.join("data/summary.json"), summary).unwrap();
    }

    const SUMMARY: &str = "{\"result_digest\": \"cd\", \"points\": [{\"goal\": \"met\", \"estimands\": [{\"name\": \"a\", \
                           \"unit\": null, \"value\": 1.5, \"mcse\": 0.25}]}, {\"goal\": \"missed\"}]}";

    fn told(top: &Path) -> Vec<Glance> {
        let found = survey(top);
        let index = Index::open(top);
        index.keep_only(&found);
        found.iter().map(|found| index.glance(found)).collect()
    }

    #[test]
    fn records_are_told_the_same_with_and_without_the_index() {
        let folder = tempfile::tempdir().unwrap();
        let top = folder.path();
        record(top, "pumps/ab", SUMMARY);
        record(top, "pumps/cd", "{broken");
        fs::create_dir_all(top.join("pumps/ef.open")).unwrap();
        fs::write(top.join("pumps/ef.open/journal"), "").unwrap();
        fs::create_dir_all(top.join("other/things")).unwrap();
        std::os::unix::fs::symlink("/", top.join("round")).unwrap();
        let first = told(top);
        assert_eq!(first.len(), 3);
        assert_eq!(first[0].goal, "missed");
        assert_eq!(first[0].headlines[0].value, Some(1.5));
        assert_eq!(first[1].state, State::Unreadable);
        assert!(
            first[1].words.contains("summary.json is not JSON"),
            "{}",
            first[1].words
        );
        assert_eq!(first[2].state, State::Open);
        assert_eq!(told(top), first);
        // Thrown away, torn, or something else in its place: told all the same.
        fs::remove_file(top.join(NAME)).unwrap();
        assert_eq!(told(top), first);
        fs::write(top.join(NAME), "not a database").unwrap();
        assert_eq!(told(top), first);
        fs::remove_file(top.join(NAME)).unwrap();
        fs::create_dir(top.join(NAME)).unwrap();
        assert_eq!(told(top), first);
        // A record that changes is looked at anew, one that goes is forgotten.
        record(top, "pumps/cd", SUMMARY);
        fs::remove_dir_all(top.join("pumps/ab")).unwrap();
        let second = told(top);
        assert_eq!(second.len(), 2);
        assert_eq!(second[0].state, State::Sealed);
    }
}
