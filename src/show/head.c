// What every JSON document begins with.
#include "tacet/show.h"
#include <inttypes.h>

#define FORMAT 1 // members are only added within a format

void tacet_json_head(tacet_json *j, const char *command, const tacet_study *study,
                     const char *status)
{
    tacet_json_begin_object(j);
    tacet_json_key(j, "tacet");
    tacet_json_begin_object(j);
    tacet_json_put_count(j, "format", FORMAT);
    tacet_json_put_text(j, "version", tacet_version());
    tacet_json_put_text(j, "command", command);
    tacet_json_end_object(j);
    tacet_json_put_text(j, "caution", tacet_caution(TACET_CAUTION_SHORT));
    if (study) {
        char fingerprint[17]; // text: a JSON number holds 53 bits
        snprintf(fingerprint, sizeof fingerprint, "%016" PRIx64, study->fingerprint);
        tacet_json_key(j, "study");
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "title", study->title);
        tacet_json_put_text(j, "fingerprint", fingerprint);
        tacet_json_end_object(j);
    }
    tacet_json_put_text(j, "status", status);
}
