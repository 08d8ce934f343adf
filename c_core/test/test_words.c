/* Statuses and flags in words: the whole list has text, each its own, and nothing beside it has any. */
#include "check.h"

#define FLAG(name) {MAGNAV_FLAG_##name, #name}

void test_words(void)
{
    static const struct {
        uint32_t bit;
        const char *name;
    } flags[] = {FLAG(CAUTION_ZONE),      FLAG(BLACKOUT_ZONE),       FLAG(NEAR_GEOGRAPHIC_POLE),
                 FLAG(STEEP_DIP),         FLAG(OUTSIDE_VALIDITY),    FLAG(HEIGHT_OUT_OF_RANGE),
                 FLAG(NO_DECLINATION),    FLAG(MAGNITUDE_IMPLAUSIBLE), FLAG(DIP_IMPLAUSIBLE),
                 FLAG(UNCALIBRATED),      FLAG(ACCELERATED),         FLAG(ASSUMED_LEVEL),
                 FLAG(FORWARD_VERTICAL),  FLAG(HEADING_UNUSABLE)};

    for (int32_t status = MAGNAV_OK; status > MAGNAV_E_END; status--) {
        CHECK(strlen(magnav_status_text(status)) > 5);
        CHECK(strcmp(magnav_status_text(status), "unknown") != 0);
        for (int32_t other = MAGNAV_OK; other > status; other--) {
            CHECK(strcmp(magnav_status_text(status), magnav_status_text(other)) != 0);
        }
    }
    CHECK(strcmp(magnav_status_text(MAGNAV_E_END), "unknown") == 0);
    CHECK(strcmp(magnav_status_text(MAGNAV_E_END - 1), "unknown") == 0);
    CHECK(strcmp(magnav_status_text(1), "unknown") == 0);

    CHECK(LENGTH(flags) == MAGNAV_FLAG_COUNT);
    for (int32_t bit = 0; bit < MAGNAV_FLAG_COUNT; bit++) {
        CHECK(flags[bit].bit == (uint32_t)1 << bit);
        CHECK(strcmp(magnav_flag_name(bit), flags[bit].name) == 0);
        CHECK(strlen(magnav_flag_text(bit)) > 10);
        for (int32_t other = 0; other < bit; other++) {
            CHECK(strcmp(magnav_flag_text(bit), magnav_flag_text(other)) != 0);
        }
    }
    CHECK(magnav_flag_name(-1) == NULL && magnav_flag_text(-1) == NULL);
    CHECK(magnav_flag_name(MAGNAV_FLAG_COUNT) == NULL && magnav_flag_text(MAGNAV_FLAG_COUNT) == NULL);
}
