// Prints what libGDSII reads of a stream, as JSON.
//
// In:  the path of the stream, as a JSON string.
// Out: {"Cells": [...], "Flat": [{"Layer", "Polygons": [[x, y, ...]]}], "Units": [user, metres]}; coordinates of cells are
//      database units as read, those of Flat are database units as laid out by the library, unrounded.
#include <cstdio>
#include <iostream>
#include <string>

#include <libGDSII.h>

static void text(const std::string &s) {
  putchar('"');
  for (unsigned char c : s)
    if (c < 32 || c > 126 || c == '"' || c == '\\')
      printf("\\u%04x", c);
    else
      putchar(c);
  putchar('"');
}

int main() {
  std::string line;
  std::getline(std::cin, line);
  if (line.size() < 2) return 2;
  setenv("LIBGDSII_LENGTH_UNIT", "1e-9", 1);
  libGDSII::GDSIIData d(line.substr(1, line.size() - 2));
  if (d.ErrMsg) {
    fprintf(stderr, "%s\n", d.ErrMsg->c_str());
    return 1;
  }
  printf("{\"Units\":[%.17g,%.17g],\"Cells\":[", d.FileUnits[0], d.FileUnits[1]);
  for (size_t i = 0; i < d.Structs.size(); i++) {
    printf("%s{\"Name\":", i ? "," : "");
    text(*d.Structs[i]->Name);
    printf(",\"Elements\":[");
    for (size_t k = 0; k < d.Structs[i]->Elements.size(); k++) {
      const GDSIIElement &e = *d.Structs[i]->Elements[k];
      printf("%s{\"Kind\":%d,\"Layer\":%d,\"Type\":%d,\"TextType\":%d,\"PathType\":%d,\"Width\":%d,\"Columns\":%d,\"Rows\":%d,"
             "\"Mirror\":%s,\"AbsoluteMagnification\":%s,\"AbsoluteAngle\":%s,\"Magnification\":%.17g,\"Angle\":%.17g,\"Name\":",
             k ? "," : "", (int)e.Type, e.Layer, e.DataType, e.TextType, e.PathType, e.Width, e.Columns, e.Rows,
             e.Refl ? "true" : "false", e.AbsMag ? "true" : "false", e.AbsAngle ? "true" : "false", e.Mag, e.Angle);
      text(e.SName ? *e.SName : "");
      printf(",\"Text\":");
      text(e.Text ? *e.Text : "");
      printf(",\"XY\":[");
      for (size_t n = 0; n < e.XY.size(); n++) printf("%s%d", n ? "," : "", e.XY[n]);
      printf("],\"Attributes\":[");
      for (size_t n = 0; n < e.PropAttrs.size(); n++) printf("%s%d", n ? "," : "", e.PropAttrs[n]);
      printf("],\"Values\":[");
      for (size_t n = 0; n < e.PropValues.size(); n++) {
        if (n) putchar(',');
        text(e.PropValues[n]);
      }
      printf("]}");
    }
    printf("]}");
  }
  printf("],\"Flat\":[");
  double unit = d.FileUnits[1] / 1e-9;
  for (size_t n = 0; n < d.Layers.size(); n++) {
    printf("%s{\"Layer\":%d,\"Polygons\":[", n ? "," : "", d.Layers[n]);
    bool first = true;
    for (const Entity &e : d.ETable[n]) {
      if (e.Text) continue;
      printf("%s[", first ? "" : ",");
      first = false;
      for (size_t k = 0; k < e.XY.size(); k++) printf("%s%.9g", k ? "," : "", e.XY[k] / unit);
      printf("]");
    }
    printf("]}");
  }
  printf("]}\n");
}
