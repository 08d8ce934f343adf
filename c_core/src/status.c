/* Statuses and flags in words: one text each, the same on desk and target. */
#include "magnav_core.h"

const char *magnav_status_text(int32_t status)
{
    switch (status) {
    case MAGNAV_OK: return "computed";
    case MAGNAV_E_NULL: return "a required pointer is NULL";
    case MAGNAV_E_NOT_FINITE: return "a value is NaN, infinite or too large to compute with";
    case MAGNAV_E_LATITUDE: return "latitude outside -90 to 90 degrees";
    case MAGNAV_E_LONGITUDE: return "longitude outside -360 to 360 degrees";
    case MAGNAV_E_HEIGHT: return "height outside -10,000 m to 10,000,000 m";
    case MAGNAV_E_DATE: return "date outside the model's validity";
    case MAGNAV_E_MODEL: return "the model's degree, order, pieces or breaks are not usable";
    case MAGNAV_E_MEMORY: return "the buffer handed in is too small";
    case MAGNAV_E_TIME: return "sample times do not increase";
    case MAGNAV_E_ACCELERATION: return "the acceleration is zero: no vertical";
    case MAGNAV_E_MAGNETIC: return "the magnetic vector is zero or vertical: no direction";
    case MAGNAV_E_PARAMETER: return "a setting is outside its range";
    case MAGNAV_E_AREA: return "outside the area, heights or dates of the patch";
    default: return "unknown";
    }
}

typedef struct flag_words {
    const char *name;
    const char *text;
} flag_words;

static const flag_words FLAGS[MAGNAV_FLAG_COUNT] = {
    {"CAUTION_ZONE", "horizontal field below 6000 nT: compass in the caution zone, readings may be poor"},
    {"BLACKOUT_ZONE", "horizontal field below 2000 nT: compass in the blackout zone, not to be relied on"},
    {"NEAR_GEOGRAPHIC_POLE", "within 0.1 degree of a geographic pole: true north is ill-defined, use grid north"},
    {"STEEP_DIP", "the field dips by more than 80 degrees: a tilt error grows more than 5.7 times into the heading"},
    {"OUTSIDE_VALIDITY", "date outside the model's validity: extrapolated"},
    {"HEIGHT_OUT_OF_RANGE", "height outside -1 km to 850 km, for which the models are specified"},
    {"NO_DECLINATION", "the horizontal field is zero: no declination"},
    {"MAGNITUDE_IMPLAUSIBLE", "measured field magnitude differs from the model's: local disturbance or sensor scale"},
    {"DIP_IMPLAUSIBLE", "measured dip differs from the model's: local disturbance or tilt"},
    {"UNCALIBRATED", "no calibration was applied"},
    {"ACCELERATED", "the body accelerates: tilt from the accelerometer is uncertain"},
    {"ASSUMED_LEVEL", "no accelerometer: the sensor is taken to be level"},
    {"FORWARD_VERTICAL", "the forward axis is within 5 degrees of the vertical: heading ill-defined"},
    {"HEADING_UNUSABLE", "the 95 % interval covers the whole circle: no heading"},
};

const char *magnav_flag_name(int32_t bit)
{
    return (bit >= 0 && bit < MAGNAV_FLAG_COUNT) ? FLAGS[bit].name : NULL;
}

const char *magnav_flag_text(int32_t bit)
{
    return (bit >= 0 && bit < MAGNAV_FLAG_COUNT) ? FLAGS[bit].text : NULL;
}

int32_t magnav_core_version(void)
{
    return MAGNAV_CORE_VERSION;
}

int32_t magnav_real_bytes(void)
{
    return (int32_t)sizeof(magnav_real);
}

int32_t magnav_max_degree(void)
{
    return MAGNAV_MAX_DEGREE;
}
