//! A full disk and a read-only one, as small file systems in memory: told plainly, nothing lost, the same bytes after.

#[path = "common/program.rs"]
mod program;

use std::collections::BTreeMap;
use std::fs;
use std::io::{BufRead, BufReader, Write};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::sync::OnceLock;

/// What the file system rounds sizes up to.
const PAGE: u64 = 4096;
/// Room for what is small: the lock, `run.json`, `cells.csv`, each twice for a moment.
const SMALL: u64 = 16 * PAGE;

/// A file system in memory that ends with this. It is mounted in a namespace of its own, which needs no more rights than
/// most systems give to anybody and leaves no mount behind, and reached through a process that lives there.
struct Disk {
    shell: Child,
    mounted: PathBuf,
}

impl Disk {
    fn new(mounted: &Path) -> Self {
        fs::create_dir(mounted).unwrap();
        let shell = Command::new("unshare")
            .args(["--map-root-user", "--mount", "sh"])
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .spawn()
            .unwrap();
        let mut disk = Self {
            shell,
            mounted: mounted.to_owned(),
        };
        disk.mount("size=64k");
        disk
    }

    fn mount(&mut self, options: &str) {
        let place = self.mounted.display();
        let line = format!(
            "if mountpoint -q {place}; then mount -o remount,{options} {place}; \
             else mount -t tmpfs -o {options} none {place}; fi && echo done || echo failed\n"
        );
        let input = self.shell.stdin.as_mut().unwrap();
        input.write_all(line.as_bytes()).unwrap();
        let mut reply = String::new();
        BufReader::new(self.shell.stdout.as_mut().unwrap())
            .read_line(&mut reply)
            .unwrap();
        assert_eq!(reply, "done\n", "a small disk cannot be mounted here");
    }

    fn resize(&mut self, bytes: u64) {
        self.mount(&format!("rw,size={bytes}"));
    }

    fn at(&self, name: &str) -> PathBuf {
        let inside = self.mounted.strip_prefix("/").unwrap();
        Path::new(&format!("/proc/{}/root", self.shell.id()))
            .join(inside)
            .join(name)
    }
}

impl Drop for Disk {
    fn drop(&mut self) {
        drop(self.shell.stdin.take());
        // The shell ends with its input.
        let _ = self.shell.wait();
    }
}

/// Exit code and what was said on standard error.
fn search(out: &Path, resume: bool) -> (i32, String) {
    let output = program::search(Path::new(program::STUDY), out, resume)
        .output()
        .unwrap();
    (
        output.status.code().unwrap(),
        String::from_utf8(output.stderr).unwrap(),
    )
}

/// The run that nothing disturbs.
fn unbroken() -> &'static Path {
    static RUN: OnceLock<tempfile::TempDir> = OnceLock::new();
    RUN.get_or_init(|| {
        let run = tempfile::tempdir().unwrap();
        // And quiet says nothing.
        assert_eq!(search(&run.path().join("run"), false), (0, String::new()));
        run
    })
    .path()
}

/// Every file of a folder and its rooms.
fn files(folder: &Path) -> BTreeMap<String, Vec<u8>> {
    let mut files = BTreeMap::new();
    for room in [".", "cells", "figures"] {
        for entry in fs::read_dir(folder.join(room)).into_iter().flatten() {
            let path = entry.unwrap().path();
            if path.is_file() {
                let name = path.file_name().unwrap().to_str().unwrap();
                files.insert(format!("{room}/{name}"), fs::read(&path).unwrap());
            }
        }
    }
    files
}

fn room_of<'a>(files: &'a BTreeMap<String, Vec<u8>>, room: &str) -> BTreeMap<&'a str, &'a [u8]> {
    files
        .iter()
        .filter(|(name, _)| name.starts_with(room))
        .map(|(name, bytes)| (name.as_str(), bytes.as_slice()))
        .collect()
}

#[test]
fn law_a_full_disk_is_told_and_loses_nothing() {
    let whole = files(&unbroken().join("run"));
    let size = |part: &str| -> u64 {
        let sizes = whole.iter().filter(|(name, _)| name.contains(part));
        sizes
            .map(|(_, bytes)| (bytes.len() as u64).next_multiple_of(PAGE))
            .sum()
    };
    let temp = tempfile::tempdir().unwrap();
    let mut disk = Disk::new(&temp.path().join("disk"));
    let run = disk.at("run");

    // No room even for the record.
    disk.resize(PAGE);
    fs::write(disk.at("filler"), [1; PAGE as usize]).unwrap();
    let (code, said) = search(&run, false);
    assert_eq!(code, 1, "{said}");
    assert!(
        said.contains("run.json: cannot be made: No space left on device"),
        "{said}"
    );
    assert!(
        said.contains("no work was started; make room on the disk and start again"),
        "{said}"
    );
    fs::remove_file(disk.at("filler")).unwrap();

    // Room for more and more of the run; each sitting goes as far as it can and says what it could not write.
    let cell = size("cells/00000.json");
    let lists = size("front.csv") + size("front.json");
    let records = size("figures/width_sweep.json") + size("figures/period.json");
    let steps = [
        (SMALL + cell / 2, "cells/", 0),
        (SMALL + 2 * cell + cell / 2, "cells/", 1),
        (SMALL + size("cells/0"), "front.csv", 4),
        (SMALL + size("cells/0") + lists, "figures/", 4),
        (SMALL + size("cells/0") + lists + records, "figures/", 4),
    ];
    let mut kept: BTreeMap<String, Vec<u8>> = BTreeMap::new();
    for (room, what, least_cells) in steps {
        disk.resize(room);
        for list in ["front.csv", "front.json"] {
            // A list that is there would want room for two, more than the figures do.
            let _ = fs::remove_file(run.join(list));
        }
        let (code, said) = search(&run, run.join("run.json").exists());
        assert_eq!(code, 1, "{said}");
        assert!(
            said.contains("No space left on device") && said.contains("resume"),
            "{said}"
        );
        let path = said.split("error: ").nth(1).unwrap();
        assert!(
            path.split(": ").next().unwrap().contains(what),
            "{what}: {said}"
        );
        assert!(!said.contains("damaged"), "{said}");
        let there = files(&run);
        let cells = room_of(&there, "cells/0");
        assert!(cells.len() >= least_cells, "{room}: {:?}", cells.keys());
        for (name, bytes) in room_of(&kept, "cells/0") {
            assert!(cells.get(name) == Some(&bytes), "{name} is not as it was");
        }
        for (name, bytes) in cells {
            assert!(whole[name] == bytes, "{name} is not the unbroken run's");
        }
        kept = there;
    }
    disk.resize(64 << 20);
    let (code, said) = search(&run, true);
    assert_eq!(code, 0, "{said}");
    let ended = files(&run);
    assert!(ended["./front.csv"] == whole["./front.csv"]);
    let names = |files: &BTreeMap<String, Vec<u8>>| files.keys().cloned().collect::<Vec<_>>();
    assert_eq!(names(&ended), names(&whole), "something is left over");
}

#[test]
fn law_a_read_only_folder_is_told_and_stays_as_it_is() {
    let whole = files(&unbroken().join("run"));
    let temp = tempfile::tempdir().unwrap();
    let mut disk = Disk::new(&temp.path().join("disk"));
    disk.mount("ro,size=64m");
    let (code, said) = search(&disk.at("run"), false);
    assert_eq!(code, 1, "{said}");
    assert!(
        said.contains("run: cannot be made: Read-only file system"),
        "{said}"
    );
    assert!(
        said.contains("make the folder writable") && said.contains("--out"),
        "{said}"
    );

    // A run that lacks a cell.
    disk.mount("rw,size=64m");
    let run = disk.at("run");
    for room in ["cells", "figures"] {
        fs::create_dir_all(run.join(room)).unwrap();
    }
    for (name, bytes) in &whole {
        fs::write(run.join(name), bytes).unwrap();
    }
    fs::remove_file(run.join("cells/00001.json")).unwrap();
    let before = files(&run);
    disk.mount("ro");
    let (code, said) = search(&run, true);
    assert_eq!(code, 1, "{said}");
    assert!(
        said.contains("lock: cannot be written: Read-only file system"),
        "{said}"
    );
    assert!(
        said.contains("what is finished is kept; make the folder writable and go on"),
        "{said}"
    );
    // Without --resume it is still a run that is there already.
    assert_eq!(search(&run, false).0, 2);
    assert!(files(&run) == before);
    disk.mount("rw");
    assert_eq!(search(&run, true).0, 0);
    assert!(files(&run)["./front.csv"] == whole["./front.csv"]);
}
