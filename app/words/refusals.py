"""Why something typed, or a file's row, is not taken: what failed, which value, what is accepted."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "batch.empty": "There is nothing to record.",
    "channel.unknown": "'{channel}' is no channel. Accepted: {accepted} ('luffmark channels' lists all).",
    "correction.half_gas":
        "{channel:name} is one value of the gas of {at:time}: {left:list} would be left without it. Only this value?",
    "correction.many_entries": "{count} entries begin with '{entry}'. Accepted: {accepted}.",
    "correction.no_reason": "A correction needs its reason: {accepted}.",
    "correction.same_episode": "The entry is in {episode} already. Name {accepted}.",
    "correction.superseded": "This {channel:name} has been superseded meanwhile. Correct {accepted}.",
    "correction.unknown_entry": "Entry {entry} is not one that can be corrected here. Accepted: {accepted}.",
    "device.into_the_future": "Moved so, samples would lie ahead of the clock. Accepted: {accepted}.",
    "device.moved_too_far": "A clock cannot be off by {value} minutes. Accepted: up to {accepted} minutes, not 0.",
    "device.no_channel": "No channel was named. Accepted: {accepted}.",
    "device.nothing_there": "No sample of these channels lies in that span. Accepted: {accepted}.",
    "document.damaged": "Document {value} is not what was kept: its digest does not fit.",
    "document.unknown": "There is no document {value} in the store.",
    "doubt.after_the_end":
        "Support ended at {ended_at:time}: does it begin again?",
    "doubt.gas_with_mask_off":
        "A gas and the mask coming off stand at the same minute, {at:time}: the gas counts as drawn before. If it "
        "was drawn after, log it a minute later.",
    "doubt.gas_with_new_fio2":
        "The FiO2 changes in the minute of the gas: the gas counts as drawn before, on {fio2:fraction}. If not, log "
        "its own: gas fio2.",
    "doubt.label_in_use":
        "{label} is in use: episode {episode}[[, since {since:time}]], has not ended. Two patients, or the same one?",
    "doubt.mask_off_already":
        "The mask is off already, since {since:time}. Was it on in between?",
    "doubt.mask_on_already":
        "The mask is on already[[, since {since:time}]]. Was it off in between?",
    "doubt.mask_both_ways":
        "The mask {logged:pick on=going on;off=coming off} stands at this minute too ({at:time}): it counts as "
        "{last:pick on=on;off=off} from then. Was that the last?",
    "doubt.salvaged": "It was saved from a damaged file, where nothing proves that it was not changed.",
    "doubt.second_value":
        "[[{channel:name} {first:of} is logged for this minute already ({at:time}). ]]Two values of one moment: "
        "which one is right?",
    "doubt.settings_off_mask":
        "The mask is off since {since:time}: these settings act once it is on. If it is on, log 'mask on' too.",
    "doubt.unusual":
        "{channel:name} {value:typed} is outside the usual {low:of} to {high:of}.",
    "entry.id_too_long": "The id '{value}' is too long: at most {accepted} characters are accepted.",
    "entry.in_future": "{at:time} lies in the future: it is {now:time} now. Accepted: {accepted}.",
    "entry.no_episode":
        "[['{value}' is no usable key of an episode. ]]An entry needs its episode. Accepted: {accepted}.",
    "entry.no_number": "{channel:name} has no value. Accepted: {accepted}.",
    "entry.no_span": "[['{value}' is no usable length of time. ]]The span needs one. Accepted: {accepted}.",
    "entry.no_words": "{channel:name} has no text. Accepted: {accepted}.",
    "entry.not_a_device_channel": "{channel:name} cannot hold device samples. Accepted: {accepted}.",
    "entry.not_finite": "{channel:name} '{value}' is no finite number. Accepted: {accepted}.",
    "entry.replaces_other_channel":
        "An entry for {channel:name} cannot replace one for {value:name}. Accepted: {accepted:name}.",
    "entry.replaces_other_episode": "An entry of {value} cannot replace one of {accepted}.",
    "entry.replaces_unknown": "There is no entry '{value}' to replace. Accepted: {accepted}.",
    "entry.span_backwards": "The span ends before it starts. Accepted: {accepted}.",
    "entry.span_only_withdrawn": "A mask or shift of device samples can only be withdrawn. Accepted: {accepted}.",
    "entry.text_too_long": "The {field} is {length} characters long; at most {accepted} are accepted.",
    "entry.text_unreadable": "The {field} holds characters that cannot be kept. Accepted: {accepted}.",
    "entry.time_out_of_range": "The time of an entry is out of range. Accepted: {accepted}.",
    "episode.bad_key":
        "'{episode}' cannot name an episode: one word of at most {accepted} printable characters is accepted.",
    "episode.exists": "Episode {episode} exists already. Name {accepted}.",
    "episode.nothing_stands":
        "Nothing stands of episode '{episode}': what was recorded of it was withdrawn, or was not known yet. "
        "Accepted: {accepted}.",
    "episode.unknown": "There is no episode '{episode}' in this store. "
        "{near:pick yes=Nearest;else=Known}: {accepted}.",
    "erasure.no_reason": "Removing an episode needs its reason: {accepted}.",
    "erasure.unknown_episode": "There is nothing of episode '{episode}' to remove. Accepted: {accepted}.",
    "due_word.no_reason": "That something is not needed here needs its reason: {accepted}.",
    "due_word.not_due": "{due:due} is not due in episode {episode}. Accepted: {accepted}.",
    "flag.no_reason": "Settling a flag needs its reason: {accepted}.",
    "flag.not_open": "The flag '{marker:marker}' is not open: it is {state}.",
    "flag.unknown": "Episode {episode} has no flag {flag}.",
    "instant.in_future": "The time {value} lies in the future: it is {now} now. Accepted: {accepted}.",
    "instant.no_offset":
        "The time '{value}' has no offset. Accepted: ISO 8601 with offset, e.g. 2026-03-28T02:10+00:00.",
    "instant.out_of_range": "The time '{value}' is out of range. Accepted: years 1990 to 2099.",
    "instant.unreadable":
        "'{value}' is no time. Accepted: ISO 8601 with offset, e.g. 2026-03-28T02:10+00:00.",
    "leak.definitions_mixed":
        "Leak of episode {episode} was {first} and is {second} at the same time: which one is it?",
    "line.empty": "Nothing is typed yet. For example: {accepted}",
    "line.epap_needed": "A pressure support needs an EPAP, and none is in force. For example: {accepted}.",
    "line.gas_unit": "{unit} counts for every pressure of this gas.",
    "line.long_ago": "That was {hours:hours} ago.",
    "line.mode_becomes": "The mode becomes {mode}[[ (was {before})]].",
    "line.mode_contradicts": "{mode} has no {channel:name} pressure. For example: {accepted}.",
    "line.mode_needed": "{mode} is in force, which has no IPAP. Name the mode too, e.g. {accepted}.",
    "line.number_alone": "The number {value} alone does not say what it is. For example: {accepted}",
    "line.oxygen_unclear": "Oxygen {value} could be a flow or an FiO2. Say which: {accepted}.",
    "line.ps_means_ipap": "Pressure support {ps} over EPAP {epap:trim} is IPAP {ipap:trim} cmH2O.",
    "line.site_assumed": "No sample site is named: taken as arterial, unless this gas has one already.",
    "line.start_unseen":
        "Nothing shows that support starts here: its hours would not count. '{accepted}' on the line, or "
        "'{accepted} 23:40', says since when.",
    "line.time_form": "The time '{value}' is not understood. Accepted: {accepted}.",
    "line.time_in_words": "'{time}' stays among the words; a time stands first on the line.",
    "line.time_twice": "The line has a time of its own, and another moment is given beside it. Accepted: {accepted}.",
    "line.too_long": "The line is too long. Accepted: at most {accepted}.",
    "line.two_meanings": "'{word}' could mean more than one thing. Say which: {accepted}.",
    "line.twice": "{channel:name} stands twice on the line. Accepted: {accepted}.",
    "line.signed":
        "{channel:name} '{value}': is that a change, or the value? Accepted: {accepted}.",
    "line.unconfirmed":
        "{count:pick 1=One value needs;else=Several values need} a yes before being recorded.",
    "line.value_missing": "{channel:name} has no value on the line. Accepted: {accepted}.",
    "line.word_unknown": "'{word}' is not understood. For example: {accepted}",
    "panel.axis_unreadable": "Panel '{title}': the end of an axis cannot be '{value}'. Accepted: {accepted}.",
    "panel.axis_upside_down": "Panel '{title}': the low end {low:trim} is not below the high end {high:trim}. "
        "Accepted: {accepted}.",
    "panel.channel_unknown": "Panel '{title}': '{channel}' cannot be drawn. Accepted: {accepted}.",
    "panel.empty": "Panel '{title}' has no channel. Accepted: {accepted}.",
    "panel.format_newer": "The panels are of format {format}, newer than this program reads ({accepted}).",
    "panel.last": "The last panel stays.",
    "panel.no_name": "A panel needs {accepted}.",
    "panel.no_set": "There is no set of panels called '{name}'. Accepted: {accepted}.",
    "panel.too_many": "{count} panels are too many; at most {accepted} are accepted.",
    "panel.too_many_channels": "Panel '{title}' has {count} channels; at most {accepted} are accepted.",
    "panel.too_many_units": "Panel '{title}' has channels in {units}. Accepted: {accepted}.",
    "panel.unknown": "There is no panel '{panel}'. Accepted: {accepted}.",
    "panel.unreadable": "The panels cannot be read: {detail}. Accepted: {accepted}.",
    "passphrase.too_short": "The passphrase has {length} characters. Accepted: {accepted}.",
    "policy.as_shipped": "{path} is not in the file: it stands as shipped.",
    "policy.forms_differ":
        "{path}: {mmHg:trim} mmHg and {kpa:trim} kPa are not the same (it would be {would_be:1} kPa).",
    "policy.missing": "{path} is missing.",
    "policy.no_source": "{path} is empty: every number needs its source.",
    "policy.not_a_table": "{path} is '{value}' and no table.",
    "policy.out_of_range": "{path} = {value:trim} is not possible. Accepted: {low:trim} to {high:trim}.",
    "policy.passed_over":
        "The policy put in force at {at:time}[[ by {by}]] (SHA-256 {hash}) cannot be read: {detail}. "
        "{name}, version {version:0}, stays in force.",
    "policy.unknown_key": "{path} is not known. Accepted: {accepted}.",
    "policy.wrong_order": "{first} ({low:trim}) must lie below {second} ({high:trim}).",
    "policy.wrong_value": "{path} = {value} is not possible ({detail}). Accepted: {accepted}.",
    "policy.invalid": "This is no usable policy: {detail}.",
    "policy.unreadable": "The policy is no TOML text: {detail}.",
    "row.columns": "The row has {found} fields; the header has {accepted}.",
    "row.device_entry": "'{value}' is no action for device samples. Accepted: {accepted}.",
    "row.quotes": "A quotation mark is not closed, or stands in a wrong place ({detail}).",
    "row.repeated": "The row stands in the file already, on line {first_line}. Accepted: {accepted}.",
    "row.key_is_label":
        "A new episode '{value}' would begin beside {episodes}, which the ward calls so and which has not ended.",
    "row.label_shared":
        "'{label}' is the label of episode {episode} too, which has not ended: one patient under two keys, or two in "
        "one bed?",
    "row.two_values": "{channel:name} has another value at the same moment on line {first_line}: {first:of}. "
        "The later row counts.",
    "row.unknown_action": "'{value}' is no action. Accepted: {accepted}.",
    "row.unknown_zone": "'{value}' is no time zone. Accepted: {accepted}.",
    "samples.too_many": "{count} device samples are too many for one block; at most {accepted} are accepted.",
    "samples.not_increasing": "The device samples of {channel:name} are not in order. Accepted: {accepted}.",
    "settings.ipap_not_above_epap": "IPAP {ipap:trim} is not above EPAP {epap:trim} cmH2O. "
        "Accepted: {accepted}.",
    "settings.late_contradiction":
        "With what came later, IPAP {ipap:trim} is not above EPAP {epap:trim} cmH2O. Accepted: {accepted}.",
    "target.wrong_order":
        "The SpO2 target {low:trim} to {high:trim} % is the wrong way round. Accepted: {accepted}.",
    "time.not_yet": "{value} has not come yet. Accepted: {accepted}.",
    "time.repeated": "{value} came twice: the clock was set back. Say which: {accepted}.",
    "time.skipped": "{value} was never shown: the clock was set forward. Accepted: {accepted}.",
    "time.unreadable": "'{value}' is no time of day. Accepted: {accepted}.",
    "undo.superseded": "It cannot be taken back: somebody has changed the {channel:name} since.",
    "unit.unknown": "'{unit}' is no unit of {channel:name}. Accepted: {accepted}.",
    "value.missing": "{channel:name} has no value. Accepted: {accepted}.",
    "value.not_a_choice": "{channel:name} '{value}' is not one of its choices. Accepted: {accepted}.",
    "value.not_a_number": "{channel:name} '{value}' is no number. Accepted: {accepted}.",
    "value.past_hard_limit": "{channel:name} {value} is not possible[[ ({meant} would be)]]. Accepted: {accepted}.",
    "value.too_long": "The text of {channel:name} has {length} characters; at most {accepted} are accepted.",
}  # fmt: skip
