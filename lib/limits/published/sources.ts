// In: nothing. Out: where each published value was read.

export const SOURCES: Readonly<Record<string, { readonly title: string; readonly read?: string }>> = {
  UM10204r6: {
    title: "NXP UM10204 I2C-bus specification and user manual, Rev. 6, 4 April 2014",
    read: "full text copy github Jeangowhy/opendocs mcu/I2C_Bus_Protocol_UM10204.md @251d4bec",
  },
  UM10204r7: {
    title: "NXP UM10204 Rev. 7.0, 1 October 2021",
    read: "full text copy; original https://www.nxp.com/docs/en/user-guide/UM10204.pdf",
  },
  "UM10204r6+r7": { title: "both revisions read and equal for this value" },
  UM10204r3: {
    title: "UM10204 Rev. 03, 19 June 2007",
    read: "https://fliphtml5.com/dfbj/otdk/UM10204_I2C-bus_specification_and_user_manual/17",
  },
  SLVA689: {
    title: "TI SLVA689, I2C Bus Pullup Resistor Calculation, Feb 2015, section 4 Example",
    read: "https://www.ti.com/document-viewer/lit/html/SLVA689/example-slva6896346",
  },
  "SMB-STM32": { title: "ST STM32G4 reference manual RM0440, 39.4.11-13 SMBus", read: "" },
  "SMB-LMKDB": {
    title: "TI LMKDB1104 datasheet SNAS855D, SMBus timing, 100 kHz and 400 kHz classes",
    read: "https://ti.com/document-viewer/LMKDB1104/datasheet/GUID-XXXXXXXX-SF0T-XXXX-XXXX-000000335570",
  },
  "SMB-TPS53676": {
    title: "TI TPS53676 datasheet ZHCSN24A, PMBus timing incl. 1000 kHz class",
    read: "https://www.ti.com.cn/document-viewer/cn/TPS53676/datasheet/GUID-XXXXXXXX-SF0T-XXXX-XXXX-000000216347",
  },
  "SMB3-MWITTY": {
    title: "text copy of SMBus Specification 3.0 (20 Dec 2014), p. 78 comparison table Fm+ / 1 MHz class",
    read: "https://mwitty.com/content.php?id=5813626 (OCR, noisy)",
  },
  "SMB-LM5066": { title: "TI LM5066 datasheet SNVS655G Table 45 with notes 1-4", read: "datasheet copy" },
  "SMB-BQ33100": {
    title: "TI BQ33100 datasheet SLUS987C SMBus timing",
    read: "https://www.ti.com/document-viewer/lit/html/SLUS987C/timing-requirements-smbus-slus9116217",
  },
  "SMB-DS16EV": {
    title: "TI/NSC DS16EV5110 datasheet SMBus timing, note: compliant to SMBus 2.0 section 3.1.1",
    read: "http://www.datasheetandpdf.com/EN/NSC/6/DS16EV5110_0706.htm",
  },
  "SMB-WIKI": { title: "Wikipedia System Management Bus, Electrical (cites SMBus 3.0)", read: "mirror zalansite.site" },
  "LINUX-SMB": { title: "Linux Documentation/i2c/smbus-protocol.rst", read: "torvalds/linux @026c0fe6" },
};
