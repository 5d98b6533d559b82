"""What goes wrong with files, disks and stores, and what to do then. No driver's words stand alone."""

from typing import Final

_CHAIN = (
    "missing_batch=a batch is missing;previous_hash=it does not follow the one before;"
    "batch_facts=its facts were changed;missing_rows=rows are missing;"
    "rows_of_another_batch=rows were moved between batches;rows_changed=rows were changed;"
    "recorded_at=its recording time steps back"
)

TEMPLATES: Final[dict[str, str]] = {
    "archive.bad_retention": "{value} is no retention time. Accepted: 1 to {accepted} days.",
    "archive.differs": "What was archived of {episode} is not what the store says: nothing was archived.",
    "archive.no_retention": "Nothing is removed before the ward has said how long it keeps. Accepted: {accepted}.",
    "archive.not_ended": "{episode} has no recorded end. Accepted: {accepted}.",
    "archive.nothing": "There is nothing to archive. Accepted: {accepted}.",
    "archive.removed": "{episodes:0} episode(s) and {documents:0} closed handover(s) were removed for good.",
    "archive.still_named": "{count:0} closed handover(s) kept after the end may name them still: their own time "
        "is over on {until:time}. Remove again then.",
    "archive.too_early": "The retention time of {episode} is not over. Accepted: from {accepted:time} on.",
    "demo.sample_refused": "The sample shift cannot be taken in: {detail}.",
    "error.unexpected": "Something went wrong in the program: {detail}. Nothing was recorded by this step.",
    "export.backwards": "The span ends ({end:time}) before it starts ({start:time}).",
    "file.binary": "The file is not text: it holds NUL bytes. Accepted: {accepted}.",
    "file.changed": "The file changed while it was read: take it in again once it is whole.",
    "file.disk_full": "The disk is full: [[{path} ]]could not be written. Make room and try again.",
    "file.empty": "The file is empty. Its first line must be a header: {accepted}.",
    "file.encoding": "The text is {found}. Accepted: {accepted}.",
    "file.failed": "{path} cannot be used: {detail}.",
    "file.is_folder": "{path} is a folder. Name a file.",
    "file.missing": "{path} is not there.",
    "file.name_too_long": "The name {path} is too long for this disk.",
    "file.no_folder": "The folder of {path} is not there.",
    "file.not_allowed": "{path} may not be opened or written by you. Choose another place or ask who owns it.",
    "file.read_only_disk": "{path} lies on a disk that takes no writing. Choose another place.",
    "file.too_large": "The file is too large. Accepted: {accepted}.",
    "file.too_many_entries":
        "The file holds more than {accepted} entries beside device samples. Accepted: the same in several files, cut "
        "by time or episode.",
    "file.too_many_episodes":
        "The file holds device samples of more than {accepted} channels of episodes. Accepted: the same in several "
        "files.",
    "file.exists": "{path} exists already. Name another file, or say --replace.",
    "handover.backwards": "The shift ends ({end:time}) before it starts ({start:time}).",
    "handover.not_begun": "The shift that begins {start:time} has not begun by {now:time}.",
    "handover.paper": "'{paper}' is no paper. Accepted: {accepted}.",
    "handover.printer":
        "Nothing was printed: {printer} takes nothing. Choose another printer, or save the sheet as a PDF (Ctrl+P).",
    "handover.too_long": "A shift of {hours:0} h is too long: at most {accepted} h are accepted.",
    "intake.cancelled": "The intake of {path} was stopped: nothing was taken.",
    "intake.overtaken":
        "Something was recorded of the same episodes since {path} was read: nothing was taken. Accepted: {accepted}.",
    "intake.refused": "{path} was not taken: {rows} row(s) refused. Accepted: {accepted}.",
    "intake.unknown_source": "Nothing was taken in as '{value}'. Accepted: {accepted}.",
    "intake.withdrawn_already": "{path} was withdrawn already. Accepted: {accepted}.",
    "key.envelope_altered": "The key file beside the store was altered or is damaged ({detail}); the passphrase is "
        "not to blame, and the store itself may be whole. Put the key file of a backup in its place.",
    "key.envelope_missing": "This file is no store, or an encrypted one whose key file {path} is not beside it. "
        "Put it back, or that of a backup.",
    "key.of_another_store": "That key file opens, but not {path}: it belongs to another store, or the store's first "
        "page is damaged. Nothing was changed. Try the key file of another backup.",
    "key.envelope_newer": "The key file is of format {format}, newer than this program reads. "
        "Update the program.",
    "key.unwritable": "The key file {path} could not be written: {detail}. The one before still holds.",
    "key.wrong_passphrase": "The passphrase is wrong. The recovery code is accepted too.",
    "replay.backwards": "The span ends ({end:time}) before it starts ({start:time}).",
    "replay.worker_lost": "A process of the replay ended by itself: perhaps the computer ran out of memory. "
        "Replay fewer episodes, or a shorter span.",
    "salvage.batches_lost": "{count:0} recording(s) lost their time and author; values took the time before.",
    "salvage.doubtful": "{count:0} entries are kept and marked doubtful: nothing proves that they were not changed.",
    "salvage.kept_lost": "{count:0} layouts or drafts were damaged and left out.",
    "salvage.lost_between": "What was lost had been recorded between {first:time} and {last:time}.",
    "salvage.rows_lost": "{count:0} row(s) were lost: they cannot be read, or make no sense.",
    "salvage.saved": "Saved: {entries:0} entries of {episodes:0} episode(s), {samples:0} device samples, {others:0} "
        "documents, policies and events.",
    "salvage.tail_unknown": "A page cannot be read: more may have been recorded than is known of.",
    "salvage.unlinked": "{count:0} correction(s) or move(s) lost what they replaced and stand on their own.",
    "salvage.withdrawals_lost": "{count:0} withdrawal(s) were left out: what they took back is lost too.",
    "statistics.backwards": "The span ends ({end:time}) before it starts ({start:time}).",
    "store.archive": "{path} is an archive of closed episodes: it is open for reading only.",
    "store.backup_failed": "The backup {path} could not be written: {detail}.",
    "store.busy": "{path} is busy: another program is writing. Nothing was recorded by this step; try again in a "
        "moment.",
    "store.busy_for_now": "Another program is writing into {path}: it can be read, and nothing can be recorded until "
        "that ends.",
    "store.cannot_open": "{path} cannot be opened: {detail}.",
    "store.damaged":
        "[[{path}]][[!path|The store]] is damaged: part of the file is not what was written ({detail:pick "
        "file is not a database=its pages fail their check;database disk image is malformed=its pages do not fit "
        "together}). Restore the "
        "newest backup into a new store, or save what can be read.[[ {first:pick page=It is the first page that "
        "fails: if the rest is whole, the key file beside it may be that of another store.}]]",
    "restore.not_checked": "{path} is encrypted and no passphrase was given: its key file is whole and its length is "
        "right; its pages, its chain and its rules were not checked, and nothing was compared with the old store. "
        "Check it once it is open (Store, Check this store).",
    "store.episode_not_as_written": "What is kept of {episode} is not what was written, so no figure is given of it. "
        "Check the store, restore a backup, or save what can be read.",
    "ward.unread": "Missing from the ward: {episodes}. What is kept of it is not what was written. Look at that "
        "patient, then restore a backup, or save what can be read.",
    "store.not_as_written": "What the store keeps is not what was written, so no figure is given that rests on it. "
        "Check the store, restore a backup, or save what can be read.",
    "store.damaged_chunk": "A block of device samples is damaged. Run verify, and restore a backup.",
    "store.disk_error": "The disk failed while {path} was used: {detail}.",
    "store.disk_full": "The disk is full: nothing was recorded in {path}. Make room and try again.",
    "store.exists": "{path} exists already and is never overwritten. Name another file.",
    "store.facts": "The own facts of {path} are not what was kept: it is open for reading only. Run verify.",
    "store.failed": "{path} could not be used: {detail}.",
    "store.export_failed": "{path} could not be written: {detail}.",
    "store.file_gone": "{path} is no longer there. Was it moved, or a disk taken out?",
    "store.low_disk": "The disk of {path} is nearly full: {free_mb:0} MB are free, {needed_mb:0} MB are wanted. Make "
        "room before nothing can be recorded.",
    "store.migrated": "{path} was of the older format {format} and was brought up to date. As it was before it lies "
        "beside it as {backup}.",
    "store.missing": "There is no store {path}. Take in a file to make one, or name another.",
    "store.needs_passphrase": "{path} is encrypted. Give its passphrase (--passphrase-fd N).",
    "store.network_share": "{path} lies on a network share ({kind}), where locks cannot be relied on. "
        "Use a local disk: copy the store there, with the key file beside it if there is one.",
    "store.newer": "{path} is of format {format}; this program reads up to {accepted}. Update the program.",
    "store.newer_read_only": "{path} was written by a newer program (format {format}): it is open for reading only. "
        "Update the program to record.",
    "store.no_folder": "The folder {path} is not there.",
    "store.not_a_store": "{path} is not a store of this program.",
    "store.not_encrypted": "{path} is not encrypted, so it has no passphrase.",
    "store.older": "{path} is of the older format {format}; this program reads {accepted}. It is brought up "
        "to date once it is opened where it can be written.",
    "store.read_only": "{path} is open for reading only: nothing can be recorded.",
    "store.read_only_place": "{path} lies where you may not write: it is open for reading only.",
    "store.restore_failed": "The store {path} could not be made from the backup: {detail}.",
    "store.trigger": "A safeguard of the store is not as it should be ({name}: {what}): "
        "it is open for reading only. Run verify.",
    "verify.chain": "The chain breaks at batch {batch}[[, recorded {at:time}]][[ by {by}]][[, of {episodes}]]: "
        "{what:pick " + _CHAIN + "}.",
    "verify.chunk": "Device samples of {channel:name} in episode {episode} are damaged (row {seq}).",
    "verify.derived": "The table {table} does not agree with the ledger for {count} episode(s), "
        "first {episode}.",
    "verify.document": "Document {id} is damaged (row {seq}).",
    "verify.entry": "Entry {seq} breaks a rule: {what}.",
    "verify.facts": "The store's own facts (its format, its id, whether it is an archive) are not what was kept.",
    "verify.kept": "The {table} '{name}' is damaged and is left out.",
    "verify.orphan": "Row {seq} claims batch {batch}, which does not own it.",
    "verify.pages": "The file is damaged: {detail}.",
    "verify.trigger": "The safeguard {name} is not as it should be: {what}.",
    "witness.bad_line": "Line {line} of {path} is no line of a witness file.",
    "witness.not_borne_out": "The store does not hold the head {head} that was witnessed at {at} (line {line}): what "
        "was recorded up to then was cut off or replaced.",
    "witness.unreadable": "{path} cannot serve as a witness: {detail}.",
    "witness.unwritable": "The witness file {path} could not be written: {detail}.",
    "verify.unreadable": "The store cannot be read to its end: {path}[[ ({detail})]].",
}  # fmt: skip
